import type { Pattern } from '../../contract/findings.ts'
import { localClock, WEEKDAYS, type Weekday } from '../../timeline/local-clock.ts'
import { type Spans, spansOf } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { type Preferred, ratePattern } from './rate-pattern.ts'

const DAY_MS = 86_400_000
const LEAST_DAYS = 13
const NAMES: Readonly<Record<Weekday, string>> = {
  mon: 'on Mondays',
  tue: 'on Tuesdays',
  wed: 'on Wednesdays',
  thu: 'on Thursdays',
  fri: 'on Fridays',
  sat: 'on Saturdays',
  sun: 'on Sundays',
}

/**
 * Whether trips prefer weekends to workdays, or one day of the week: exact comparison of rates over energised time, adjusted
 * for the eight that are tried. Several trips of one day count as one, for a bad day is no weekday. Below 13 days no weekday comes twice, and nothing is said.
 */
export function weekdayPattern(timeline: Timeline, trips: readonly number[]): Pattern {
  const { from, to } = timeline
  if (to - from < LEAST_DAYS * DAY_MS) {
    return { verdict: 'Under two weeks do not tell weekdays apart: let the logger stay longer.', p: null }
  }
  const clock = localClock(timeline.sheet.timeZone)
  const days = clock.days(from, to)
  const firsts = trips.filter((t, i) => i === 0 || clock.dayNumber(t) !== clock.dayNumber(trips[i - 1]!))
  const known = spansOf([[from, to]])
  const on = (wanted: readonly Weekday[]): Spans =>
    spansOf(days.filter(({ weekday }) => wanted.includes(weekday)).map((day) => [day.from, day.to] as const))
  const sets: Preferred[] = [
    { words: 'on Saturdays and Sundays', inside: on(['sat', 'sun']), known },
    ...WEEKDAYS.map((day) => ({ words: NAMES[day], inside: on([day]), known })),
  ]
  return ratePattern(timeline.energised, firsts, sets, 'No workdays and weekends to compare.', 'trip day')
}
