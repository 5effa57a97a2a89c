import { requireEventCount, requireRange, requireSameLength } from './checks.ts'
import { type Partition, partitionOf, requireSeries } from './partition.ts'
import { pelt } from './pelt.ts'

/**
 * Change points in the rate of counts (say trips a day) with a penalty for each (usually 2 or 3 times ln n). The cost of a segment
 * is 2 (S − S ln(S / T)), S its sum, T its length or, with `exposure`, its exposure (energised hours); values are rates.
 *
 * @throws {CoreError} not_finite, unequal_lengths, out_of_range (counts, exposure not above 0)
 * @see Killick, Fearnhead & Eckley (2012), JASA 107, 1590-1598
 */
export function changepointPoisson(
  counts: ArrayLike<number>,
  options: { readonly penalty: number; readonly minSegment?: number; readonly exposure?: ArrayLike<number> },
): Partition {
  const { penalty, minSegment = 1, exposure } = options
  requireSeries('changepointPoisson', counts, penalty)
  requireRange(
    'changepointPoisson',
    Number.isSafeInteger(minSegment) && minSegment >= 1,
    'a whole minSegment from 1',
    minSegment,
  )
  if (exposure) requireSameLength('changepointPoisson', counts, exposure)
  const n = counts.length
  const sums = new Float64Array(n + 1)
  const times = new Float64Array(n + 1)
  for (let i = 0; i < n; i++) {
    requireEventCount('changepointPoisson', counts[i]!)
    const time = exposure ? exposure[i]! : 1
    requireRange('changepointPoisson', time > 0 && time < Number.POSITIVE_INFINITY, 'finite exposures above 0', time)
    sums[i + 1] = sums[i]! + counts[i]!
    times[i + 1] = times[i]! + time
  }
  const cost = (from: number, to: number): number => {
    const sum = sums[to]! - sums[from]!
    return sum === 0 ? 0 : 2 * (sum - sum * Math.log(sum / (times[to]! - times[from]!)))
  }
  return partitionOf(n, pelt(n, cost, penalty, minSegment), penalty, (from, to) => ({
    value: (sums[to]! - sums[from]!) / (times[to]! - times[from]!),
    cost: cost(from, to),
  }))
}
