import { localClock } from '../../timeline/local-clock.ts'
import { contains, intersect, measureWithin, type Spans, totalMs } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'

const HOUR_MS = 3_600_000

/** Hours in which people are about, local minutes, and how lively the rest is beside them; judgement, no source. */
const UP = 6 * 60
const DOWN = 23 * 60
const BY_NIGHT = 0.1
/** Prior probability that trips of whatever cause follow people's day. */
const WAKING = 0.4

/**
 * How lively a site is over the day: trips that people's use brings about come by day whatever their cause, which must
 * neither accuse what happens to run by day nor clear what runs by night. Under a habit all time is stretched so that trips
 * come evenly.
 */
export interface Habit {
  /** Prior probability of the habit. */
  readonly prior: number
  /** Hours of a set of energised time, stretched so that all energised time keeps its length. */
  hoursOf(spans: Spans): number
  /** Factor by which an hour at this local minute of the day is stretched. */
  at(minuteOfDay: number): number
  /** ln of the stretching at every trip, summed. */
  readonly logDensity: number
}

/** A flat day, and one in which people are up; by what the trips of the timeline would say of each. */
export function habitsOf(
  timeline: Timeline,
  trips: readonly { readonly from: number; readonly to: number }[],
): readonly Habit[] {
  const flat: Habit = { prior: 1 - WAKING, hoursOf: (s) => totalMs(s) / HOUR_MS, at: () => 1, logDensity: 0 }
  const { energised, from, to } = timeline
  const waking = localClock(timeline.sheet.timeZone).dailySpans(from, to, UP, DOWN)
  const all = totalMs(energised)
  if (all <= 0) return [flat]
  const lively = (spans: Spans): number =>
    BY_NIGHT * totalMs(spans) + (1 - BY_NIGHT) * totalMs(intersect(spans, waking))
  const scale = all / lively(energised)
  let logDensity = 0
  for (const trip of trips) {
    const length = trip.to - trip.from
    const awake =
      length < 2 ? Number(contains(waking, trip.from - 1)) : measureWithin(waking, trip.from, trip.to) / length
    logDensity += Math.log(scale * (BY_NIGHT + (1 - BY_NIGHT) * awake))
  }
  return [
    flat,
    {
      prior: WAKING,
      hoursOf: (spans) => (scale * lively(spans)) / HOUR_MS,
      at: (minute) => scale * (minute >= UP && minute < DOWN ? 1 : BY_NIGHT),
      logDensity,
    },
  ]
}
