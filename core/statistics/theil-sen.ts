import normalQuantile from '@stdlib/stats-base-dists-normal-quantile'
import { CoreError } from '../errors.ts'
import { requireConfidence, requireFinite, requireRange, requireSameLength } from './checks.ts'
import { median, medianSorted } from './median.ts'

export interface TheilSen {
  /** Median slope over all pairs with different x; unit of y over unit of x. */
  readonly slope: number
  /** median(y) − slope · median(x). */
  readonly intercept: number
  /** Sen's limits of the slope; null when all values tie. */
  readonly low: number | null
  readonly high: number | null
  /** Pairs with different x. */
  readonly pairs: number
}

/** All pairs are held in memory: 3,000 points make 4.5 million. Longer series want bucket medians anyway. */
const MOST = 3000

/**
 * Theil–Sen line: the median of the slopes of all pairs; up to 29 % of wild values do not move it far. Limits after Sen, from
 * the normal approximation of Kendall's S, corrected for ties.
 *
 * @throws {CoreError} too_few_values (no two different x), unequal_lengths, not_finite, out_of_range (over 3,000 points)
 * @see Theil (1950), Indag. Math. 12; Sen (1968), JASA 63, 1379-1389
 */
export function theilSen(
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  options: { readonly confidence?: number } = {},
): TheilSen {
  const confidence = options.confidence ?? 0.95
  requireConfidence('theilSen', confidence)
  requireSameLength('theilSen', x, y)
  requireFinite('theilSen', x)
  requireFinite('theilSen', y)
  const n = x.length
  requireRange('theilSen', n <= MOST, `at most ${MOST} points (take bucket medians)`, n)
  const all = new Float64Array((n * (n - 1)) / 2)
  let pairs = 0
  for (let i = 0; i < n; i++) {
    for (let j = i + 1; j < n; j++) {
      if (x[i] !== x[j]) all[pairs++] = (y[j]! - y[i]!) / (x[j]! - x[i]!)
    }
  }
  if (pairs === 0) throw new CoreError('too_few_values', `theilSen needs two different x, got ${n} points`)
  const slopes = all.subarray(0, pairs).sort()
  const slope = medianSorted(slopes)
  const intercept = median(y) - slope * median(x)

  const variance = (n * (n - 1) * (2 * n + 5) - tieTerm(x) - tieTerm(y)) / 18
  if (variance <= 0) return { slope, intercept, low: null, high: null, pairs }
  const reach = normalQuantile((1 + confidence) / 2, 0, 1) * Math.sqrt(variance)
  const lowRank = Math.max(0, roundHalfEven((pairs - reach) / 2) - 1)
  const highRank = Math.min(pairs - 1, roundHalfEven((pairs + reach) / 2))
  return { slope, intercept, low: slopes[lowRank]!, high: slopes[highRank]!, pairs }
}

/** Σ t (t − 1)(2t + 5) over groups of t equal values. */
function tieTerm(values: ArrayLike<number>): number {
  const ascending = Float64Array.from(values).sort()
  let sum = 0
  for (let i = 0; i < ascending.length; ) {
    let end = i + 1
    while (end < ascending.length && ascending[end] === ascending[i]) end++
    const t = end - i
    sum += t * (t - 1) * (2 * t + 5)
    i = end
  }
  return sum
}

function roundHalfEven(x: number): number {
  const floor = Math.floor(x)
  return x - floor === 0.5 ? floor + (floor % 2) : Math.round(x)
}
