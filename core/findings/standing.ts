import { GAP_INTERVALS, type Series, usualInterval } from '../timeline/series.ts'
import type { Spans } from '../timeline/spans.ts'

/** Values with the time they held, ascending; ties are one entry. */
export interface HeldLevels {
  readonly values: Float64Array
  /** Time, ms, and number of readings of each value. */
  readonly ms: Float64Array
  readonly counts: Float64Array
}

/**
 * How long each level held within `within`: every reading stands for the halves of the distances to its neighbours, each
 * at most half the gap limit, so that a logger that speeds up near events does not distort what follows. O(n + d log d)
 * for d different values.
 */
export function heldLevels(series: Series, within: Spans): HeldLevels {
  const { t, v } = series
  const usual = usualInterval(series)
  const most = (Number.isFinite(usual) ? GAP_INTERVALS * usual : 1_000) / 2
  const at = new Map<number, number>()
  const ms: number[] = []
  const counts: number[] = []
  let s = 0
  for (let i = 0; i < t.length; i++) {
    const here = t[i]!
    while (s < within.length && within[s + 1]! <= here) s += 2
    if (s >= within.length) break
    if (here < within[s]!) continue
    const left = Math.min(most, (here - (i > 0 ? t[i - 1]! : here - usual)) / 2, here - within[s]!)
    const right = Math.min(most, ((i + 1 < t.length ? t[i + 1]! : here + usual) - here) / 2, within[s + 1]! - here)
    const held = Number.isNaN(left + right) ? 2 * most : left + right
    let k = at.get(v[i]!)
    if (k === undefined) {
      k = ms.length
      at.set(v[i]!, k)
      ms.push(0)
      counts.push(0)
    }
    ms[k]! += held
    counts[k]! += 1
  }
  const values = Float64Array.from(at.keys()).sort()
  const index = Array.from(values, (value) => at.get(value)!)
  return {
    values,
    ms: Float64Array.from(index, (k) => ms[k]!),
    counts: Float64Array.from(index, (k) => counts[k]!),
  }
}

/**
 * Quantiles of levels by the time they held: Hyndman & Fan's type 8 carried over to weights. The k-th reading sits at
 * probability (C + w/2 + w̄/6) / (W + w̄/3), C the time below it, w its own, w̄ the mean, W all; between such points it is
 * linear. With equal weights that is (k − 1/3) / (n + 1/3). NaN without any level.
 *
 * @see Hyndman & Fan (1996), The American Statistician 50, 361-365
 */
export function heldQuantile(levels: HeldLevels, p: number): number {
  const { values, ms, counts } = levels
  let total = 0
  let n = 0
  for (let k = 0; k < values.length; k++) {
    total += ms[k]!
    n += counts[k]!
  }
  if (!(total > 0)) return values.length === 0 ? Number.NaN : values[values.length >> 1]!
  const mean = total / n
  const target = p * (total + mean / 3) - mean / 6
  let below = 0
  let lastEnd = Number.NEGATIVE_INFINITY
  let last = values[0]!
  for (let k = 0; k < values.length; k++) {
    const one = ms[k]! / counts[k]!
    // A tie is a plateau from its first reading to its last.
    const start = below + one / 2
    const end = below + ms[k]! - one / 2
    if (target <= end) {
      if (target >= start || lastEnd === Number.NEGATIVE_INFINITY) return values[k]!
      return last + ((values[k]! - last) * (target - lastEnd)) / (start - lastEnd)
    }
    below += ms[k]!
    lastEnd = end
    last = values[k]!
  }
  return last
}
