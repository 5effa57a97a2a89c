import { CoreError } from '../errors.ts'
import type { Spans } from './spans.ts'

/**
 * Readings of one channel as columns: `t` epoch ms, strictly ascending; `v` in the channel's unit, finite.
 * A gap has no reading; whoever needs one asks `usualInterval` and looks at the distances.
 */
export interface Series {
  readonly t: Float64Array
  readonly v: Float64Array
}

export const EMPTY_SERIES: Series = { t: new Float64Array(0), v: new Float64Array(0) }

/** Makes a series of two lists. @throws {CoreError} unequal_lengths, not_ascending, not_finite */
export function seriesOf(t: ArrayLike<number>, v: ArrayLike<number>): Series {
  if (t.length !== v.length)
    throw new CoreError('unequal_lengths', `seriesOf got ${t.length} times and ${v.length} values`)
  for (let i = 0; i < t.length; i++) {
    if (!Number.isFinite(v[i])) throw new CoreError('not_finite', `seriesOf got ${v[i]} at index ${i}`)
    if (i > 0 && !(t[i]! > t[i - 1]!))
      throw new CoreError('not_ascending', `seriesOf needs ascending times, index ${i} is not`)
  }
  return { t: Float64Array.from(t), v: Float64Array.from(v) }
}

/** Pieces that follow each other in time, as one series. A single piece is given back as it is. */
export function joinSeries(pieces: readonly Series[]): Series {
  const [only] = pieces
  if (pieces.length === 1 && only !== undefined) return only
  const n = pieces.reduce((sum, { t }) => sum + t.length, 0)
  const t = new Float64Array(n)
  const v = new Float64Array(n)
  let at = 0
  for (const piece of pieces) {
    t.set(piece.t, at)
    v.set(piece.v, at)
    at += piece.t.length
  }
  return { t, v }
}

/** First index whose time is at or after `ms`; the length when there is none. O(log n). */
export function lowerBound(t: Float64Array, ms: number): number {
  let low = 0
  let high = t.length
  while (low < high) {
    const middle = (low + high) >>> 1
    if (t[middle]! < ms) low = middle + 1
    else high = middle
  }
  return low
}

/** The readings in [from, to) as a view on the same memory. O(log n). */
export function sliceSeries(series: Series, from: number, to: number): Series {
  const a = lowerBound(series.t, from)
  const b = Math.max(a, lowerBound(series.t, to))
  return { t: series.t.subarray(a, b), v: series.v.subarray(a, b) }
}

/**
 * The usual distance of neighbouring readings, ms: the median of at most 1,001 distances spread evenly over the
 * series; NaN with fewer than two readings.
 */
export function usualInterval(series: Series): number {
  const kept = usualIntervals.get(series.t)
  if (kept !== undefined) return kept
  const interval = middleDistance(series)
  usualIntervals.set(series.t, interval)
  return interval
}

/** Asked for again and again of the same columns, which nobody changes. */
const usualIntervals = new WeakMap<Float64Array, number>()

function middleDistance(series: Series): number {
  const n = series.t.length - 1
  if (n < 1) return Number.NaN
  const count = Math.min(n, 1_001)
  const distances = new Float64Array(count)
  for (let k = 0; k < count; k++) {
    const i = count === 1 ? 0 : Math.floor((k * (n - 1)) / (count - 1))
    distances[k] = series.t[i + 1]! - series.t[i]!
  }
  distances.sort()
  return distances[count >> 1]!
}

/** How many usual intervals may pass between two readings before a gap lies between them (contract: three). */
export const GAP_INTERVALS = 3

/** How far apart readings may be before a gap lies between them, ms; NaN with fewer than two readings. */
export function gapLimit(series: Series): number {
  return GAP_INTERVALS * usualInterval(series)
}

/** The time between neighbouring readings that are farther apart than `limit` ms. O(n). */
export function gaps(series: Series, limit: number = gapLimit(series)): Spans {
  const { t } = series
  const out: number[] = []
  for (let i = 1; i < t.length; i++) {
    if (t[i]! - t[i - 1]! > limit) out.push(t[i - 1]!, t[i]!)
  }
  return Float64Array.from(mergedEdges(out))
}

/**
 * The time that readings speak for: from each reading to the next when they are at most `limit` ms apart, else for
 * `hold` ms (one usual interval when left out). O(n).
 */
export function loggedSpans(
  series: Series,
  limit: number = gapLimit(series),
  hold: number = usualInterval(series) || 0,
): Spans {
  const { t } = series
  const out: number[] = []
  const reach = Math.min(hold, limit) || hold
  let begun = 0
  for (let i = 0; i < t.length; i++) {
    if (i + 1 < t.length && t[i + 1]! - t[i]! <= limit) continue
    if (t[i]! + reach > t[begun]!) out.push(t[begun]!, t[i]! + reach)
    begun = i + 1
  }
  return Float64Array.from(out)
}

/** Joins intervals that touch. */
function mergedEdges(edges: readonly number[]): number[] {
  const out: number[] = []
  for (let i = 0; i < edges.length; i += 2) {
    if (out.length > 0 && out[out.length - 1] === edges[i]) out[out.length - 1] = edges[i + 1]!
    else out.push(edges[i]!, edges[i + 1]!)
  }
  return out
}
