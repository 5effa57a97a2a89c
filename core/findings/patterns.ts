import type { Pattern, Patterns } from '../contract/findings.ts'
import { quantile } from '../statistics/quantile.ts'
import type { Series } from '../timeline/series.ts'
import { type Spans, spansOf, totalMs } from '../timeline/spans.ts'
import { nightSpans, sunTimes } from '../timeline/sun.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { clockPattern } from './clock-pattern.ts'
import { episodes } from './episodes.ts'
import { periodPattern } from './period-pattern.ts'
import { type Preferred, ratePattern } from './rate-pattern.ts'
import { heldAbove, thinned } from './windows/held.ts'
import { antecedent } from './windows/weather-windows.ts'
import { figure } from './words.ts'

const HOUR_MS = 3_600_000
const MINUTE_MS = 60_000
/** Fewer trips with a known time cannot show a pattern. */
const LEAST_TRIPS = 5
/** A trip known no closer than this has no time of day. */
const VAGUE_MS = 30 * MINUTE_MS
const TOO_FEW: Pattern = { verdict: 'Too few trips with a known time to say.', p: null }
/** Wet: so many mm of rain still standing, drying by half in so many hours. */
const WET_MM = 1
const HALF_LIVES = [3, 12] as const
const LAGS = [0, 6] as const

/**
 * When trips come: time of day, period, sun, rain, temperature, load current (methods.md §6, §7), each as one sentence
 * with its test. Trips known only within half an hour or worse are left out; with fewer than five the answer says so.
 */
export function patterns(timeline: Timeline): Patterns {
  const trips = episodes(timeline.trips)
    .filter((trip) => trip.to - trip.from <= VAGUE_MS)
    .map((trip) => (trip.from + trip.to) / 2)
  const enough = trips.length >= LEAST_TRIPS && totalMs(timeline.energised) > 0
  const asked = (ask: () => Pattern): Pattern => (enough ? ask() : TOO_FEW)
  return {
    clock: asked(() => clockPattern(timeline, trips)),
    period: asked(() => periodPattern(timeline, trips)),
    sun: sunPattern(timeline, trips, enough),
    rain: rainPattern(timeline, trips, enough),
    temperature: levelPattern(timeline, timeline.temperature, trips, enough, 'temperature', '°C', [0.25, 0.75]),
    load: levelPattern(timeline, timeline.loadCurrent, trips, enough, 'load current of the group', 'A', [0.75, 0.9]),
    timedSteps: [],
  }
}

function sunPattern(timeline: Timeline, trips: readonly number[], enough: boolean): Pattern {
  const { latitude, longitude } = timeline.sheet
  if (latitude === undefined || longitude === undefined) {
    return { verdict: 'The sheet has no latitude and longitude.', p: null }
  }
  if (!enough) return TOO_FEW
  const { from, to } = timeline
  const known = spansOf([[from, to]])
  const after = (name: 'sunrise' | 'sunset'): Spans => {
    const pairs: [number, number][] = []
    for (let t = from - 24 * HOUR_MS; t < to + 24 * HOUR_MS; t += 24 * HOUR_MS) {
      const at = sunTimes(t, latitude, longitude)[name]
      if (at !== null) pairs.push([at - 15 * MINUTE_MS, at + 45 * MINUTE_MS])
    }
    return spansOf(pairs)
  }
  return ratePattern(
    timeline.energised,
    trips,
    [
      { words: 'in the dark', inside: nightSpans(from, to, latitude, longitude), known },
      { words: 'within the hour round sunset', inside: after('sunset'), known },
      { words: 'within the hour round sunrise', inside: after('sunrise'), known },
    ],
    'No dark or light hours to compare.',
  )
}

function rainPattern(timeline: Timeline, trips: readonly number[], enough: boolean): Pattern {
  const { rain } = timeline
  if (rain === null) return { verdict: 'No rain is logged.', p: null }
  if (!enough) return TOO_FEW
  const sets: Preferred[] = []
  for (const halfLife of HALF_LIVES) {
    for (const lag of LAGS) {
      const { inside, known } = heldAbove(antecedent(rain, halfLife), WET_MM, true, lag * HOUR_MS)
      const late = lag === 0 ? '' : `, ${lag} hours late`
      sets.push({ words: `in wet hours (drying by half in ${halfLife} h${late})`, inside, known })
    }
  }
  return ratePattern(timeline.energised, trips, sets, 'No wet and dry hours to compare.')
}

function levelPattern(
  timeline: Timeline,
  series: Series | null,
  trips: readonly number[],
  enough: boolean,
  name: string,
  unit: string,
  shares: readonly number[],
): Pattern {
  if (series === null) return { verdict: `No ${name} is logged.`, p: null }
  if (!enough) return TOO_FEW
  if (series.v.length === 0) return { verdict: `No ${name} is logged.`, p: null }
  const sample = thinned(series.v, 5_000)
  const sets = shares.map((share): Preferred => {
    const above = share >= 0.5
    const cut = quantile(sample, share)
    const { inside, known } = heldAbove(series, cut, above, 0)
    return { words: `while it was ${above ? 'above' : 'below'} ${figure(cut)} ${unit}`, inside, known }
  })
  return ratePattern(timeline.energised, trips, sets, `The ${name} did not change enough to compare.`)
}
