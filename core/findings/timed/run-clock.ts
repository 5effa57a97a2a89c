import { type LocalClock, localClock } from '../../timeline/local-clock.ts'
import { contains, type Spans, spansOf } from '../../timeline/spans.ts'
import { sunTimes } from '../../timeline/sun.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { energisedClock } from '../energised-clock.ts'
import type { RaisedRun, RaisedRuns } from './raised-runs.ts'

const HOUR_MS = 3_600_000
const DAY_MS = 24 * HOUR_MS

/** The clocks by which runs are looked at, made once for a timeline. */
export interface RunClock {
  readonly timeline: Timeline
  readonly wall: LocalClock
  /** Epoch ms of each day's event, ascending; null without coordinates. */
  readonly sun: { readonly sunset: Float64Array; readonly sunrise: Float64Array } | null
  /** Hours since the beginning of the span, on the wall or under supply, and back. */
  readonly hours: Readonly<Record<'wall' | 'supply', HourClock>>
  /** Hours of the span without supply. */
  readonly outageHours: number
  /** Whether a rise at this instant would have been seen: not when the device opened at once. */
  readonly isWatched: (ms: number) => boolean
  readonly stepMs: number
}

interface HourClock {
  readonly of: (ms: number) => number
  readonly instant: (hours: number) => number
}

/** The clocks of one span: the wall, the sun and the supply, and what of it the log watched. */
export function runClock(timeline: Timeline, { watched, stepMs }: RaisedRuns): RunClock {
  const seen: Spans = spansOf(watched)
  const { latitude, longitude } = timeline.sheet
  const under = energisedClock(timeline)
  const total = under(timeline.to)
  return {
    timeline,
    wall: localClock(timeline.sheet.timeZone),
    sun: latitude === undefined || longitude === undefined ? null : sunEvents(timeline, latitude, longitude),
    hours: {
      wall: { of: (ms) => (ms - timeline.from) / HOUR_MS, instant: (h) => timeline.from + h * HOUR_MS },
      supply: { of: under, instant: (h) => supplyInstant(timeline, h) },
    },
    outageHours: (timeline.to - timeline.from) / HOUR_MS - total,
    isWatched: (ms) => contains(seen, ms - 2 * stepMs) && contains(seen, ms + 3 * stepMs),
    stepMs,
  }
}

/** When supply has been there for so many hours since the beginning of the span. */
function supplyInstant({ energised, to }: Timeline, hours: number): number {
  let left = hours * HOUR_MS
  for (let i = 0; i < energised.length; i += 2) {
    const length = energised[i + 1]! - energised[i]!
    if (left < length) return energised[i]! + left
    left -= length
  }
  return to + left
}

/** Sunsets and sunrises of the span and the days round it; days without one have none. */
export function sunEvents(
  { from, to }: { readonly from: number; readonly to: number },
  latitude: number,
  longitude: number,
): { readonly sunset: Float64Array; readonly sunrise: Float64Array } {
  const sunset = new Set<number>()
  const sunrise = new Set<number>()
  for (let t = from - DAY_MS; t < to + 2 * DAY_MS; t += DAY_MS) {
    const day = sunTimes(t, latitude, longitude)
    if (day.sunset !== null) sunset.add(day.sunset)
    if (day.sunrise !== null) sunrise.add(day.sunrise)
  }
  const column = (set: Set<number>): Float64Array => Float64Array.from(set).sort()
  return { sunset: column(sunset), sunrise: column(sunrise) }
}

/** A group of runs with the schedule that its starts keep best, not yet paid for the groups that were tried. */
export interface Kept<S> {
  readonly schedule: S
  readonly members: readonly RaisedRun[]
}
