import { quantile } from '../../statistics/quantile.ts'
import { lowerBound, type Series, usualInterval } from '../../timeline/series.ts'
import { type Spans, spansOf } from '../../timeline/spans.ts'
import type { ExposureWindow } from '../line-up.ts'
import { type Frame, HOUR_MS, normalised, windowOf } from './trip-share.ts'

/** Half-lives of drying that are tried, h. */
const HALF_LIVES = [1.5, 4, 10, 24] as const
const LAGS = [0, 2] as const
/** Millimetres of antecedent rain above which it counts as wet. */
const WET_MM = [0.3, 1, 3] as const

/**
 * Wet hours: antecedent precipitation (Kohler & Linsley 1951), rain that fades with a half-life, above a threshold,
 * with and without a lag. Half-lives, lags and thresholds are averaged over, not picked.
 */
export function rainWindows(frame: Frame): ExposureWindow[] {
  const { rain } = frame.timeline
  if (rain === null || rain.t.length < 3) return []
  const windows: (ExposureWindow | null)[] = []
  for (const halfLife of HALF_LIVES) {
    const wetness = antecedent(rain, halfLife)
    for (const lag of LAGS) {
      for (const mm of WET_MM) {
        const held = heldAbove(wetness, mm, true, lag * HOUR_MS)
        const words = `while it was wet (over ${mm} mm of rain still standing, drying by half in ${halfLife} h${lag > 0 ? `, ${lag} h late` : ''})`
        windows.push(windowOf(frame, `wet-${halfLife}-${lag}-${mm}`, words, 1, held.inside, held.known))
      }
    }
  }
  return normalised(windows)
}

/** Cold and warm hours, by quantiles of the span's own temperatures. */
export function temperatureWindows(frame: Frame): ExposureWindow[] {
  return quantileWindows(frame, frame.timeline.temperature, '°C', [
    [0.1, false],
    [0.25, false],
    [0.75, true],
    [0.9, true],
  ])
}

/** Hours of heavy load on the whole group: what fires a neutral–earth fault. */
export function loadCurrentWindows(frame: Frame): ExposureWindow[] {
  return quantileWindows(frame, frame.timeline.loadCurrent, 'A', [
    [0.7, true],
    [0.85, true],
    [0.95, true],
  ])
}

function quantileWindows(
  frame: Frame,
  series: Series | null,
  unit: string,
  cuts: readonly (readonly [number, boolean])[],
): ExposureWindow[] {
  if (series === null || series.t.length < 20) return []
  const sample = thinned(series.v, 5_000)
  const windows = cuts.map(([q, above]) => {
    const cut = quantile(sample, q)
    const held = heldAbove(series, cut, above, 0)
    const words = `while it was ${above ? 'above' : 'below'} ${Number(cut.toFixed(1))} ${unit}`
    return windowOf(frame, `${above ? 'above' : 'below'}-${q}`, words, 1, held.inside, held.known)
  })
  return normalised(windows)
}

/** Rain still standing: each amount added, all fading by half in `halfLife` hours. */
export function antecedent(rain: Series, halfLife: number): Series {
  const v = new Float64Array(rain.t.length)
  let standing = 0
  for (let i = 0; i < v.length; i++) {
    const hours = i === 0 ? 0 : (rain.t[i]! - rain.t[i - 1]!) / HOUR_MS
    standing = standing * 2 ** (-hours / halfLife) + Math.max(0, rain.v[i]!)
    v[i] = standing
  }
  return { t: rain.t, v }
}

/**
 * Where a sampled quantity lies above (or below) a value; each reading holds until the next, at most three usual
 * intervals. `shift` moves both results later, ms.
 */
export function heldAbove(
  series: Series,
  value: number,
  above: boolean,
  shift: number,
): { inside: Spans; known: Spans } {
  const hold = 3 * (usualInterval(series) || 0)
  const inside: [number, number][] = []
  const known: [number, number][] = []
  const extend = (list: [number, number][], from: number, to: number): void => {
    const last = list.at(-1)
    if (last !== undefined && from <= last[1]) last[1] = to
    else list.push([from, to])
  }
  for (let i = 0; i < series.t.length; i++) {
    const from = series.t[i]! + shift
    const next = i + 1 < series.t.length ? series.t[i + 1]! + shift : from + hold / 3
    const to = Math.min(next, from + hold)
    if (to <= from) continue
    extend(known, from, to)
    if (above ? series.v[i]! > value : series.v[i]! < value) extend(inside, from, to)
  }
  return { inside: spansOf(inside), known: spansOf(known) }
}

/** At most `n` values spread evenly. */
export function thinned(values: Float64Array, n: number): Float64Array {
  if (values.length <= n) return values
  return Float64Array.from({ length: n }, (_, k) => values[Math.floor((k * (values.length - 1)) / (n - 1))]!)
}

/** Median of the readings in [from, to); NaN without any. At most 101 readings are looked at. */
export function medianBetween(series: Series, from: number, to: number): number {
  const a = lowerBound(series.t, from)
  const b = lowerBound(series.t, to)
  if (b <= a) return Number.NaN
  return quantile(thinned(series.v.subarray(a, b), 101), 0.5)
}
