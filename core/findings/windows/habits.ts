import { type LocalClock, localClock } from '../../timeline/local-clock.ts'
import { contains, measureWithin, NO_SPANS, overlapMs, type Spans, totalMs, union } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'

const MINUTE_MS = 60_000
const HOUR_MS = 60 * MINUTE_MS

/** How lively a site is in its slack hours, beside its lively ones; judgement, no source. */
const SLACK = 0.05
/** Days that a site may keep: lively hours as local minutes (past midnight where they end first). */
const DAYS: readonly (readonly [from: number, to: number])[] = [
  [6 * 60, 23 * 60],
  [7 * 60, 17 * 60],
  [16 * 60, 24 * 60],
  [22 * 60, 7 * 60],
]
/** Prior probability of each such day; the rest goes to a flat one. */
const PRIOR = 0.1
/** A habit that the trips make so many powers of e less likely than the best is left out. */
const HOPELESS = 12
/** So many trips known only as intervals of so many hours show when nobody is up. */
const LEAST_INTERVALS = 3
const LONG_MS = 2 * HOUR_MS
const DAY_MINUTES = 1_440

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

/**
 * A flat day, and days with lively hours: some that are common, and the hours in which nobody is up to notice trips, as
 * the trips known only as intervals show them. With what the trips say of each.
 */
export function habitsOf(
  timeline: Timeline,
  trips: readonly { readonly from: number; readonly to: number }[],
): readonly Habit[] {
  const { energised, from, to } = timeline
  const all = totalMs(energised)
  const flat: Habit = { prior: 1, hoursOf: (s) => totalMs(s) / HOUR_MS, at: () => 1, logDensity: 0 }
  if (all <= 0) return [flat]
  const clock = localClock(timeline.sheet.timeZone)
  const days = DAYS.map(([start, end]) => ({
    spans: clock.dailySpans(from, to, start, end),
    isLively: (m: number) => (start < end ? m >= start && m < end : m >= start || m < end),
  }))
  const asleep = hoursUnnoticed(clock, trips)
  if (asleep !== null) {
    const edges = asleep.flatMap((yes, m) => (yes !== (asleep[m - 1] ?? false) ? [m] : []))
    if (edges.length % 2 === 1) edges.push(DAY_MINUTES)
    const pairs = Array.from({ length: edges.length / 2 }, (_, i) => [edges[2 * i]!, edges[2 * i + 1]!] as const)
    const spans = pairs.map(([start, end]) => clock.dailySpans(from, to, start, end)).reduce(union, NO_SPANS)
    days.push({ spans, isLively: (m) => asleep[Math.floor(m)] === true })
  }
  const habits = days.map(({ spans, isLively }) => habitOf(timeline, trips, spans, isLively))
  const every = [{ ...flat, prior: 1 - PRIOR * habits.length }, ...habits]
  const best = Math.max(...every.map((habit) => habit.logDensity + Math.log(habit.prior)))
  // the flat day stays first, whatever the trips say: timers are weighed on it
  return every.filter((habit, k) => k === 0 || habit.logDensity + Math.log(habit.prior) > best - HOPELESS)
}

function habitOf(
  { energised }: Timeline,
  trips: readonly { readonly from: number; readonly to: number }[],
  livelyTime: Spans,
  isLively: (minuteOfDay: number) => boolean,
): Habit {
  const lively = (spans: Spans): number => SLACK * totalMs(spans) + (1 - SLACK) * overlapMs(spans, livelyTime)
  const scale = totalMs(energised) / lively(energised)
  let logDensity = 0
  for (const trip of trips) {
    const length = trip.to - trip.from
    const share =
      length < 2 ? Number(contains(livelyTime, trip.from - 1)) : measureWithin(livelyTime, trip.from, trip.to) / length
    logDensity += Math.log(scale * (SLACK + (1 - SLACK) * share))
  }
  return {
    prior: PRIOR,
    hoursOf: (spans) => (scale * lively(spans)) / HOUR_MS,
    at: (minute) => scale * (isLively(minute) ? 1 : SLACK),
    logDensity,
  }
}

/** The minutes of the day that at least half of the long intervals cover; null with too few of those. */
function hoursUnnoticed(
  clock: LocalClock,
  trips: readonly { readonly from: number; readonly to: number }[],
): boolean[] | null {
  const long = trips.filter((trip) => trip.to - trip.from >= LONG_MS && trip.to - trip.from < 24 * HOUR_MS)
  if (long.length < LEAST_INTERVALS) return null
  const counts = new Uint32Array(DAY_MINUTES)
  for (const { from, to } of long) {
    for (let t = from; t < to; t += MINUTE_MS) counts[Math.floor(clock.minuteOfDay(t))]! += 1
  }
  return Array.from(counts, (n) => n >= long.length / 2)
}
