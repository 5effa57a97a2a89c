import { lowerBound, type Series } from '../../timeline/series.ts'
import { medianInPlace } from '../levels.ts'

const HOUR_MS = 3_600_000
/** A year of hours fits; longer spans take several hours as one. */
const MOST_HOURS = 9_000
/** Readings of one stretch that its median needs. */
const MOST_SAMPLES = 31

/** Evenly spaced values; NaN where nothing is known. */
export interface Hourly {
  readonly from: number
  /** Length of a stretch, h. */
  readonly step: number
  readonly v: Float64Array
}

/** Medians of each hour of [from, to) with at least so many readings (or of so many hours that a year's number is not passed). Linear in stretches. */
export function hourly(series: Series, from: number, to: number, least = 1): Hourly {
  const step = stepOf(from, to)
  const n = Math.floor((to - from) / (step * HOUR_MS))
  const v = new Float64Array(n).fill(Number.NaN)
  for (let i = 0; i < n; i++) {
    const a = lowerBound(series.t, from + i * step * HOUR_MS)
    const b = lowerBound(series.t, from + (i + 1) * step * HOUR_MS)
    const count = Math.min(b - a, MOST_SAMPLES)
    if (b - a < Math.max(1, least)) continue
    const sample = Float64Array.from(
      { length: count },
      (_, k) => series.v[count === 1 ? a : a + Math.floor((k * (b - a - 1)) / (count - 1))]!,
    )
    v[i] = medianInPlace(sample)
  }
  return { from, step, v }
}

/** Sums of each stretch; 0 within the log's reach where nothing was read, NaN outside it. */
export function hourlySums(series: Series, from: number, to: number): Hourly {
  const step = stepOf(from, to)
  const n = Math.floor((to - from) / (step * HOUR_MS))
  const v = new Float64Array(n).fill(Number.NaN)
  const [first, last] = [series.t[0]!, series.t.at(-1)!]
  for (let i = 0; i < n; i++) {
    const start = from + i * step * HOUR_MS
    if (start + step * HOUR_MS > first && start <= last) v[i] = 0
  }
  for (let k = 0; k < series.t.length; k++) {
    // a reading stands at the end of what it sums
    const i = Math.floor((series.t[k]! - 1 - from) / (step * HOUR_MS))
    if (i >= 0 && i < n) v[i] = (Number.isNaN(v[i]!) ? 0 : v[i]!) + Math.max(0, series.v[k]!)
  }
  return { from, step, v }
}

function stepOf(from: number, to: number): number {
  return Math.max(1, Math.ceil((to - from) / HOUR_MS / MOST_HOURS))
}

/** The values less their mean over `reach` hours on both sides, so that seasons and slow drift do not count; gaps stay gaps. */
export function withoutDrift({ v, step, from }: Hourly, reach: number): Hourly {
  const n = v.length
  const sums = new Float64Array(n + 1)
  const counts = new Float64Array(n + 1)
  for (let i = 0; i < n; i++) {
    const isKnown = Number.isFinite(v[i]!)
    sums[i + 1] = sums[i]! + (isKnown ? v[i]! : 0)
    counts[i + 1] = counts[i]! + (isKnown ? 1 : 0)
  }
  const half = Math.max(1, Math.round(reach / step))
  const out = Float64Array.from(v, (x, i) => {
    const a = Math.max(0, i - half)
    const b = Math.min(n, i + half + 1)
    return x - (sums[b]! - sums[a]!) / Math.max(1, counts[b]! - counts[a]!)
  })
  return { from, step, v: out }
}

/** Rain still standing: each stretch's rain added, all fading by half in `halfLife` hours (Kohler & Linsley 1951). */
export function standingRain({ v, step, from }: Hourly, halfLife: number): Hourly {
  const fade = 2 ** (-step / halfLife)
  let standing = 0
  const out = Float64Array.from(v, (mm) => {
    standing = standing * fade + (Number.isFinite(mm) ? mm : 0)
    return Number.isFinite(mm) ? standing : Number.NaN
  })
  return { from, step, v: out }
}

/** The values less the mean of their own hour of the day, so that a rhythm common to all days does not count; gaps stay gaps. */
export function withoutDaily({ v, step, from }: Hourly): Hourly {
  const perDay = Math.max(1, Math.round(24 / step))
  const sums = new Float64Array(perDay)
  const counts = new Float64Array(perDay)
  v.forEach((x, i) => {
    if (!Number.isFinite(x)) return
    sums[i % perDay]! += x
    counts[i % perDay]!++
  })
  return { from, step, v: v.map((x, i) => x - sums[i % perDay]! / Math.max(1, counts[i % perDay]!)) }
}
