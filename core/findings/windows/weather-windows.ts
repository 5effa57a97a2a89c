import { laggedCorrelation } from '../../statistics/correlation.ts'
import { quantile } from '../../statistics/quantile.ts'
import { lowerBound, type Series } from '../../timeline/series.ts'
import type { ExposureWindow } from '../line-up.ts'
import { heldAbove, thinned } from './held.ts'
import { type Frame, HOUR_MS, normalised, windowOf } from './trip-share.ts'

/** Half-lives of drying and lags that are tried, h. */
const HALF_LIVES = [1.5, 4, 9, 20] as const
const LAGS = [0, 1.5, 4] as const
/** Shares of the time that may count as wet, and the least rain that makes wet. */
const WET_SHARES = [0.02, 0.05, 0.1, 0.2, 0.35] as const
const LEAST_MM = 0.2

/** A drying law with the weight that the leakage log gives it. */
export interface Drying {
  readonly halfLife: number
  readonly lag: number
  readonly wetness: Series
  /** Correlation of wetness, `lag` hours ago, with the leakage; 0 without a log. */
  readonly correlation: number
}

/**
 * Antecedent precipitation (Kohler & Linsley 1951) under every half-life and lag that is tried, each correlated with
 * the hourly leakage that no named load accounts for. Empty without a rain channel.
 */
export function dryings(frame: Frame, remainder: Series | null): Drying[] {
  const { rain } = frame.timeline
  if (rain === null || rain.t.length < 3) return []
  const list: Drying[] = []
  for (const halfLife of HALF_LIVES) {
    const wetness = antecedent(rain, halfLife)
    for (const lag of LAGS) {
      list.push({
        halfLife,
        lag,
        wetness,
        correlation: remainder === null ? 0 : correlationAt(wetness, remainder, lag * HOUR_MS),
      })
    }
  }
  return list
}

/**
 * Wet hours: rain still standing above a threshold, one for each share of the time that may count as wet. Drying laws
 * are averaged over, those that fit the leakage weighing more.
 */
export function rainWindows(frame: Frame, laws: readonly Drying[]): ExposureWindow[] {
  const windows: (ExposureWindow | null)[] = []
  for (const { halfLife, lag, wetness, correlation } of laws) {
    const sample = thinned(wetness.v, 5_000)
    const seen = new Set<number>()
    for (const share of WET_SHARES) {
      const mm = Math.max(LEAST_MM, Number(quantile(sample, 1 - share).toPrecision(2)))
      if (seen.has(mm)) continue
      seen.add(mm)
      const held = heldAbove(wetness, mm, true, lag * HOUR_MS)
      const words = `while it was wet (over ${mm} mm of rain still standing, drying by half in ${halfLife} h${lag > 0 ? `, felt ${lag} h late` : ''})`
      windows.push(
        windowOf(
          frame,
          `wet-${halfLife}-${lag}-${mm}`,
          words,
          Math.max(0.1, correlation) ** 4,
          held.inside,
          held.known,
        ),
      )
    }
  }
  return normalised(windows)
}

/** Pearson correlation of a level with a wetness `lag` ms earlier, at the wetness's own times. */
function correlationAt(wetness: Series, level: Series, lag: number): number {
  const xs: number[] = []
  const ys: number[] = []
  for (let i = 0; i < wetness.t.length; i++) {
    const from = wetness.t[i]! + lag
    const a = lowerBound(level.t, from)
    const b = lowerBound(level.t, from + HOUR_MS)
    if (b - a < 5) continue
    xs.push(wetness.v[i]!)
    ys.push(quantile(thinned(level.v.subarray(a, b), 61), 0.5))
  }
  return xs.length < 12 ? 0 : (laggedCorrelation(xs, ys, 0) ?? 0)
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
    [0.98, true],
    [0.995, true],
  ])
}

function quantileWindows(
  frame: Frame,
  series: Series | null,
  unit: string,
  cuts: readonly (readonly [number, boolean])[],
): ExposureWindow[] {
  if (series === null || series.t.length < 20) return []
  const sample = thinned(series.v, 20_000)
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
