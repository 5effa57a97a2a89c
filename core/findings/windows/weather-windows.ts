import { laggedCorrelation } from '../../statistics/correlation.ts'
import { quantile } from '../../statistics/quantile.ts'
import { lowerBound, type Series } from '../../timeline/series.ts'
import type { Spans } from '../../timeline/spans.ts'
import { medianInPlace } from '../levels.ts'
import type { ExposureWindow } from '../line-up.ts'
import { heldAbove, thinned } from './held.ts'
import { withKicks } from './kicks.ts'
import { type Frame, HOUR_MS, type Layer, normalised, windowOf } from './trip-share.ts'

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
export function dryings(rain: Series | null, remainder: Series | null): Drying[] {
  if (rain === null || rain.t.length < 3) return []
  const levels = LAGS.map((lag) => (remainder === null ? null : levelsAfter(rain.t, remainder, lag * HOUR_MS)))
  return HALF_LIVES.flatMap((halfLife) => {
    const wetness = antecedent(rain, halfLife)
    return LAGS.map((lag, l): Drying => {
      const level = levels[l]
      return { halfLife, lag, wetness, correlation: level ? correlationOf(wetness.v, level) : 0 }
    })
  })
}

/**
 * Wet hours: rain still standing above a threshold, one for each share of the time that may count as wet. Drying laws
 * are averaged over, those that fit the leakage weighing more.
 */
export function rainWindows(frame: Frame, laws: readonly Drying[]): ExposureWindow[] {
  const windows: ExposureWindow[] = []
  for (const { halfLife, lag, wetness, correlation } of laws) {
    const prior = Math.max(0.1, correlation) ** 4
    const sample = thinned(wetness.v, 5_000)
    const cuts = [
      ...new Set(WET_SHARES.map((share) => Math.max(LEAST_MM, Number(quantile(sample, 1 - share).toPrecision(2))))),
    ]
    const drying = `drying by half in ${halfLife} h${lag > 0 ? `, felt ${lag} h late` : ''}`
    const layers: Layer[] = []
    let known: Spans | null = null
    for (const mm of cuts.sort((a, b) => a - b)) {
      const held = heldAbove(wetness, mm, true, lag * HOUR_MS)
      known = held.known
      const words = `while it was wet (over ${mm} mm of rain still standing, ${drying})`
      windows.push(
        ...withKicks(frame, `wet-${halfLife}-${lag}-${mm}`, words, prior, [{ inside: held.inside, weight: 1 }], known),
      )
      const below = cuts[cuts.indexOf(mm) - 1] ?? 0
      layers.push({ inside: held.inside, weight: mm ** 2 - below ** 2 })
    }
    if (known === null || layers.length < 2) continue
    const words = `while it was wet, the more the wetter (${drying})`
    windows.push(...withKicks(frame, `wetter-${halfLife}-${lag}`, words, 2 * prior, layers, known))
  }
  return normalised(windows)
}

/** Median level of the hour that begins `lag` ms after each instant; NaN where the log is silent. */
function levelsAfter(instants: Float64Array, level: Series, lag: number): Float64Array {
  return instants.map((t) => {
    const a = lowerBound(level.t, t + lag)
    const b = lowerBound(level.t, t + lag + HOUR_MS)
    return b - a < 5 ? Number.NaN : medianInPlace(Float64Array.from(thinned(level.v.subarray(a, b), 61)))
  })
}

/** Pearson correlation of a wetness with the level that followed it; 0 with too little to see. */
function correlationOf(wetness: Float64Array, level: Float64Array): number {
  const xs: number[] = []
  const ys: number[] = []
  wetness.forEach((x, i) => {
    if (Number.isNaN(level[i])) return
    xs.push(x)
    ys.push(level[i]!)
  })
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

/** Shares of the time below which the group's load current counts as light, and how steeply trips come with more of it. */
const LOAD_CUTS = [0.7, 0.85, 0.95, 0.98, 0.995] as const
const LOAD_POWERS = [3, 8] as const

/**
 * Hours of heavy load on the whole group, and load the more the heavier: what fires a neutral–earth fault.
 */
export function loadCurrentWindows(frame: Frame): ExposureWindow[] {
  const loadCurrent = liveAtTrips(frame)
  const plain = quantileWindows(
    frame,
    loadCurrent,
    'A',
    LOAD_CUTS.map((q) => [q, true] as const),
  )
  if (loadCurrent === null || loadCurrent.t.length < 20) return plain
  const sample = thinned(loadCurrent.v, 20_000)
  const cuts = [0.5, ...LOAD_CUTS].map((q) => quantile(sample, q))
  const top = cuts.at(-1)!
  if (!(top > 0)) return plain
  const held = cuts.map((cut) => heldAbove(loadCurrent, cut, true, 0))
  const steep = LOAD_POWERS.map((power) => {
    const weight = (amps: number): number => (Math.max(0, amps) / top) ** power
    const layers = held.map(({ inside }, j): Layer => {
      const below = j === 0 ? 0 : weight(cuts[j - 1]!)
      return { inside, weight: weight(cuts[j]!) - below }
    })
    return withKicks(frame, `heavier-${power}`, 'under load, the more the heavier', 0.35, layers, held[0]!.known)
  })
  return normalised([...plain.map((w) => ({ ...w, prior: 0.3 * w.prior })), ...steep.flat()])
}

/** Clocks of people and loggers differ by this much. */
const WITH_TRIP_MS = 150_000

/**
 * The group's load current as it was before each trip opened the device: its fall to nothing, which a clock that runs
 * ahead or a trip noted late puts before the trip, is the trip's own doing.
 */
function liveAtTrips({ timeline: { loadCurrent }, trips }: Frame): Series | null {
  if (loadCurrent === null) return null
  const v = loadCurrent.v.slice()
  for (const { from, to } of trips) {
    if (to - from > WITH_TRIP_MS) continue
    const end = lowerBound(loadCurrent.t, from + 1)
    const begin = Math.max(0, lowerBound(loadCurrent.t, from - WITH_TRIP_MS) - 1)
    let live = begin
    for (let i = begin; i < end; i++) {
      if (v[i]! > 0.1 * v[live]!) live = i
      else v[i] = v[live]!
    }
  }
  return { t: loadCurrent.t, v }
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
