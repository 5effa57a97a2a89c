import { CoreError } from '../errors.ts'
import { requireFinite, requireRange, requireSameLength } from './checks.ts'

export type CorrelationKind = 'pearson' | 'spearman'

/**
 * Correlation of y with x at a lag: x[t] is paired with y[t + lag], positive when y follows x. Means, deviations and
 * ranks are those of the overlap. Null when a side does not vary there (or fewer than two pairs are left).
 *
 * @throws {CoreError} unequal_lengths, not_finite, out_of_range (lag not whole)
 * @see Kendall & Stuart (1973), The Advanced Theory of Statistics 2; Spearman (1904), Am. J. Psychol. 15, 72-101 (mean ranks for ties)
 */
export function laggedCorrelation(
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  lag: number,
  kind: CorrelationKind = 'pearson',
): number | null {
  requireSameLength('laggedCorrelation', x, y)
  requireFinite('laggedCorrelation', x)
  requireFinite('laggedCorrelation', y)
  requireRange('laggedCorrelation', Number.isSafeInteger(lag), 'a whole lag', lag)
  return overlapCorrelation(Float64Array.from(x), Float64Array.from(y), lag, kind)
}

function overlapCorrelation(x: Float64Array, y: Float64Array, lag: number, kind: CorrelationKind): number | null {
  const n = x.length - Math.abs(lag)
  if (n < 2) return null
  const a = x.subarray(Math.max(0, -lag), Math.max(0, -lag) + n)
  const b = y.subarray(Math.max(0, lag), Math.max(0, lag) + n)
  return kind === 'pearson' ? pearson(a, b) : pearson(meanRanks(a), meanRanks(b))
}

function pearson(a: Float64Array, b: Float64Array): number | null {
  const n = a.length
  let meanA = 0
  let meanB = 0
  for (let i = 0; i < n; i++) {
    meanA += a[i]! / n
    meanB += b[i]! / n
  }
  let [aa, bb, ab] = [0, 0, 0]
  for (let i = 0; i < n; i++) {
    const [da, db] = [a[i]! - meanA, b[i]! - meanB]
    aa += da * da
    bb += db * db
    ab += da * db
  }
  // A side whose spread is rounding of its mean is constant.
  const flat = (square: number, mean: number): boolean => Math.sqrt(square / n) <= 1e-14 * Math.abs(mean)
  if (flat(aa, meanA) || flat(bb, meanB)) return null
  return Math.max(-1, Math.min(1, ab / Math.sqrt(aa * bb)))
}

/** Ranks from 1; equal values share the mean of their ranks. */
export function meanRanks(values: ArrayLike<number>): Float64Array {
  const order = Uint32Array.from({ length: values.length }, (_, i) => i).sort((i, j) => values[i]! - values[j]!)
  const ranks = new Float64Array(values.length)
  for (let i = 0; i < order.length; ) {
    let end = i + 1
    while (end < order.length && values[order[end]!] === values[order[i]!]) end++
    for (let k = i; k < end; k++) ranks[order[k]!] = (i + 1 + end) / 2
    i = end
  }
  return ranks
}

export interface CircularShiftTest {
  /** Correlation at lag 0, or with `maxLag` the largest absolute one over −maxLag … maxLag. */
  readonly observed: number
  readonly shifts: number
  /** Share of all shifts, the unshifted included, whose value is at least the observed one … */
  readonly pGreater: number
  /** … whose absolute value is. */
  readonly pTwoSided: number
}

/** Values this close count as equal, so that a shift that repeats the observed pairing counts. */
const TIE = 1e-12

/**
 * Circular-shift permutation test: y is turned against x by every shift, which keeps both series' own rhythm; p is the share of
 * shifts that do as well, so it is never below 1/n. With `maxLag` the statistic is the largest |correlation| over
 * the lags tried, which pays for having tried them. Cost O(n² (2 maxLag + 1)); pass hourly or daily values.
 *
 * @throws {CoreError} unequal_lengths, not_finite, out_of_range, zero_spread (a side does not vary)
 * @see Edgington & Onghena (2007), Randomization Tests, 4th ed.; Chung & Fraser (1958), JASA 53, 729-735
 */
export function circularShiftTest(
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  options: { readonly kind?: CorrelationKind; readonly maxLag?: number } = {},
): CircularShiftTest {
  const { kind = 'pearson', maxLag } = options
  requireSameLength('circularShiftTest', x, y)
  requireFinite('circularShiftTest', x)
  requireFinite('circularShiftTest', y)
  if (maxLag !== undefined)
    requireRange('circularShiftTest', Number.isSafeInteger(maxLag) && maxLag >= 0, 'a whole maxLag', maxLag)
  const n = x.length
  // Ranks of whole series do not change under a turn; those of overlaps do and are taken anew.
  const ranksOnce = kind === 'spearman' && maxLag === undefined
  const a = ranksOnce ? meanRanks(x) : Float64Array.from(x)
  const b = ranksOnce ? meanRanks(y) : Float64Array.from(y)
  const turned = new Float64Array(n)
  const statistic = (shift: number): number | null => {
    for (let t = 0; t < n; t++) turned[t] = b[(t + shift) % n]!
    if (maxLag === undefined) return pearson(a, turned)
    let largest: number | null = null
    for (let lag = -maxLag; lag <= maxLag; lag++) {
      const r = overlapCorrelation(a, turned, lag, kind)
      if (r !== null) largest = Math.max(largest ?? 0, Math.abs(r))
    }
    return largest
  }
  const observed = n > 1 ? statistic(0) : null
  if (observed === null)
    throw new CoreError('zero_spread', `circularShiftTest got ${n} pairs of which a side does not vary`)
  let greater = 0
  let twoSided = 0
  for (let shift = 0; shift < n; shift++) {
    const r = statistic(shift) ?? 0
    if (r >= observed - TIE) greater++
    if (Math.abs(r) >= Math.abs(observed) - TIE) twoSided++
  }
  return { observed, shifts: n, pGreater: greater / n, pTwoSided: twoSided / n }
}
