import type { Random } from '../../statistics/random.ts'
import type { LocalClock, LocalDay } from '../../timeline/local-clock.ts'
import { contains, type Spans, spanAt, spansOf } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'

const MINUTE_MS = 60_000
const HOUR_MS = 60 * MINUTE_MS
/** As far from the trip's time of day at most. */
const AROUND_MIN = 30
/** Under supply since at least so long, and logged. */
const CLOSED_MS = 30 * MINUTE_MS
/** Draws for each time wanted; a trip at an hour that other days do not have gives up. */
const TRIES = 8

/**
 * Draws instants at about the time of day of a trip on other days, under supply and logged, with no trip within an hour: what is usual at
 * that hour. `days` are the civil days of the span, `busy` the hours round trips. As many as asked for or fewer.
 */
export function quietTimes(
  timeline: Timeline,
  clock: LocalClock,
  days: readonly LocalDay[],
  busy: Spans,
  trip: number,
  count: number,
  random: Random,
): number[] {
  const minute = clock.minuteOfDay(trip)
  const own = clock.dayNumber(trip)
  const list: number[] = []
  for (let tries = TRIES * count; tries > 0 && list.length < count; tries--) {
    const day = days[random.integer(days.length)]!
    const offset = minute + (2 * random.uniform() - 1) * AROUND_MIN
    const at = Math.round(day.from + offset * MINUTE_MS)
    if (day.number === own || at <= timeline.from || at >= timeline.to) continue
    const closed = spanAt(timeline.energised, at - 1)
    if (closed === undefined || at - closed.from < CLOSED_MS) continue
    if (spanAt(timeline.logged, at - 1) === undefined || contains(busy, at)) continue
    list.push(at)
  }
  return list
}

/** The hours round trips, in which no time counts as quiet. */
export function roundTrips({ trips }: Timeline): Spans {
  return spansOf(trips.map(({ from, to }) => [from - HOUR_MS, to + HOUR_MS] as const))
}
