import { functionalPartition } from './changepoint-biweight.ts'
import { requireRange } from './checks.ts'
import { type Partition, partitionOf, requireSeries } from './partition.ts'
import { pelt } from './pelt.ts'
import { quantile } from './quantile.ts'

/**
 * Change points in the mean with squared error and a penalty for each (usually 2σ² ln n). Outliers become segments of their own;
 * for loggers take {@link changepointBiweight}. With `minSegment` 1 functional pruning makes it about linear.
 *
 * @throws {CoreError} not_finite, out_of_range
 * @see Killick, Fearnhead & Eckley (2012), JASA 107, 1590-1598; Maidstone et al. (2017), Stat. Comput. 27, 519-533
 */
export function changepointL2(
  y: ArrayLike<number>,
  options: { readonly penalty: number; readonly minSegment?: number },
): Partition {
  const { penalty, minSegment = 1 } = options
  requireSeries('changepointL2', y, penalty)
  requireRange(
    'changepointL2',
    Number.isSafeInteger(minSegment) && minSegment >= 1,
    'a whole minSegment from 1',
    minSegment,
  )
  if (minSegment === 1) return functionalPartition(y, penalty, Number.POSITIVE_INFINITY)
  const cost = squaredErrorCost(y)
  return partitionOf(y.length, pelt(y.length, cost, penalty, minSegment), penalty, (from, to) =>
    meanSegment(y, from, to),
  )
}

/** Σ (y − mean)² of [from, to) in constant time from running sums about the median, which a large offset does not spoil. */
export function squaredErrorCost(y: ArrayLike<number>): (from: number, to: number) => number {
  const n = y.length
  const centre = n > 0 ? quantile(y, 0.5) : 0
  const sums = new Float64Array(n + 1)
  const squares = new Float64Array(n + 1)
  for (let i = 0; i < n; i++) {
    const v = y[i]! - centre
    sums[i + 1] = sums[i]! + v
    squares[i + 1] = squares[i]! + v * v
  }
  return (from, to) => {
    const sum = sums[to]! - sums[from]!
    return Math.max(0, squares[to]! - squares[from]! - (sum * sum) / (to - from))
  }
}

/** Mean and squared error of [from, to), in two passes. */
export function meanSegment(y: ArrayLike<number>, from: number, to: number): { value: number; cost: number } {
  let off = 0
  for (let i = from; i < to; i++) off += y[i]! - y[from]!
  const value = y[from]! + off / (to - from)
  let cost = 0
  for (let i = from; i < to; i++) cost += (y[i]! - value) ** 2
  return { value, cost }
}
