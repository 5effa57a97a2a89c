import { localClock } from '../../timeline/local-clock.ts'
import { contains, intersect, measureWithin, type Spans, totalMs } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'

const HOUR_MS = 3_600_000

/** How lively a site is in its slack hours, beside its lively ones; judgement, no source. */
const SLACK = 0.1
/** Days that a site may keep: lively hours as local minutes (past midnight where they end first), and prior probability. */
const DAYS = [
  { from: 6 * 60, to: 23 * 60, prior: 0.2 },
  { from: 7 * 60, to: 17 * 60, prior: 0.1 },
  { from: 16 * 60, to: 24 * 60, prior: 0.1 },
  { from: 22 * 60, to: 7 * 60, prior: 0.1 },
] as const

/**
 * How lively a site is over the day: trips that people's use brings about come at their hours whatever the cause, which
 * must neither accuse what happens to run then nor clear what does not. Under a habit all time is stretched so that trips
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

/** A flat day, and days with lively hours; with what the trips of the timeline say of each. */
export function habitsOf(
  timeline: Timeline,
  trips: readonly { readonly from: number; readonly to: number }[],
): readonly Habit[] {
  const { energised } = timeline
  const all = totalMs(energised)
  const rest = DAYS.reduce((sum, { prior }) => sum + prior, 0)
  const flat: Habit = { prior: 1 - rest, hoursOf: (s) => totalMs(s) / HOUR_MS, at: () => 1, logDensity: 0 }
  if (all <= 0) return [flat]
  const clock = localClock(timeline.sheet.timeZone)
  return [
    flat,
    ...DAYS.map(({ from, to, prior }): Habit => {
      const hours = clock.dailySpans(timeline.from, timeline.to, from, to)
      const lively = (spans: Spans): number => SLACK * totalMs(spans) + (1 - SLACK) * totalMs(intersect(spans, hours))
      const scale = all / lively(energised)
      let logDensity = 0
      for (const trip of trips) {
        const length = trip.to - trip.from
        const share =
          length < 2 ? Number(contains(hours, trip.from - 1)) : measureWithin(hours, trip.from, trip.to) / length
        logDensity += Math.log(scale * (SLACK + (1 - SLACK) * share))
      }
      const isLively = (m: number): boolean => (from < to ? m >= from && m < to : m >= from || m < to)
      return {
        prior,
        hoursOf: (spans) => (scale * lively(spans)) / HOUR_MS,
        at: (minute) => scale * (isLively(minute) ? 1 : SLACK),
        logDensity,
      }
    }),
  ]
}
