import { squaredErrorCost } from './changepoint-l2.ts'
import { requireCount, requireFinite, requireRange } from './checks.ts'

export interface Breaks {
  /** Position of the first value of each new segment. */
  readonly changepoints: readonly number[]
  /** Residual sum of squares about the segment means. */
  readonly rss: number
  readonly bic: number
}

export interface Breakpoints {
  /** The best partition with 0, 1, 2, … breaks. */
  readonly partitions: readonly Breaks[]
  /** The one of least BIC. */
  readonly best: Breaks
}

/**
 * Break points in the mean, the best for each number of breaks up to `maxBreaks`, and that number by BIC. Exact, by dynamic
 * programming in O(n² maxBreaks), at most 5,000 values: for daily levels, not readings.
 *
 * @throws {CoreError} too_few_values (below minSegment), not_finite, out_of_range
 * @see Bai & Perron (2003), J. Appl. Econometrics 18, 1-22; Yao (1988), Stat. Probab. Lett. 6, 181-189 (BIC)
 */
export function breakpoints(
  y: ArrayLike<number>,
  options: { readonly minSegment: number; readonly maxBreaks?: number },
): Breakpoints {
  const { minSegment } = options
  const n = y.length
  requireFinite('breakpoints', y)
  requireRange(
    'breakpoints',
    Number.isSafeInteger(minSegment) && minSegment >= 1,
    'a whole minSegment from 1',
    minSegment,
  )
  requireCount('breakpoints', n, minSegment)
  requireRange('breakpoints', n <= 5000, 'at most 5000 values', n)
  const maxBreaks = Math.min(options.maxBreaks ?? 10, Math.floor(n / minSegment) - 1)
  requireRange('breakpoints', maxBreaks >= 0, 'maxBreaks from 0', maxBreaks)

  const cost = squaredErrorCost(y)
  // reach[t]: least cost of the first t values in b + 1 segments; from[b][t]: where the last of them starts.
  let reach = Float64Array.from({ length: n + 1 }, (_, t) => (t >= minSegment ? cost(0, t) : Number.POSITIVE_INFINITY))
  const from: Int32Array[] = [new Int32Array(n + 1)]
  const partitions: Breaks[] = [withBic([], reach[n]!, n)]
  for (let b = 1; b <= maxBreaks; b++) {
    const next = new Float64Array(n + 1).fill(Number.POSITIVE_INFINITY)
    const starts = new Int32Array(n + 1)
    for (let t = (b + 1) * minSegment; t <= n; t++) {
      for (let s = b * minSegment; s <= t - minSegment; s++) {
        const value = reach[s]! + cost(s, t)
        if (value < next[t]!) {
          next[t] = value
          starts[t] = s
        }
      }
    }
    from.push(starts)
    reach = next
    const changepoints: number[] = []
    for (let [level, t] = [b, n]; level > 0; level--) {
      t = from[level]![t]!
      changepoints.unshift(t)
    }
    partitions.push(withBic(changepoints, reach[n]!, n))
  }
  return { partitions, best: partitions.reduce((a, b) => (b.bic < a.bic ? b : a)) }
}

/** BIC with a mean for each segment, a variance and a parameter for each break. */
function withBic(changepoints: readonly number[], rss: number, n: number): Breaks {
  const bic =
    n * (Math.log(rss) + 1 - Math.log(n) + Math.log(2 * Math.PI)) + 2 * (changepoints.length + 1) * Math.log(n)
  return { changepoints, rss, bic }
}
