import { Temporal } from 'temporal-polyfill'
import type { Timetable } from '../contract/records.ts'
import { CoreError } from '../errors.ts'
import { type Spans, spansOf } from './spans.ts'

const DAY = 86_400_000
const MINUTE = 60_000

export type Weekday = Timetable['days'][number]

/** Monday first, as ISO 8601 counts. */
export const WEEKDAYS: readonly Weekday[] = ['mon', 'tue', 'wed', 'thu', 'fri', 'sat', 'sun']

/** A civil day of a zone: 23, 24 or 25 hours, or 30 minutes more or less on Lord Howe Island. */
export interface LocalDay {
  /** Days from 1970-01-01 to this date on the calendar. */
  readonly number: number
  /** First instant of the day, and of the next one; epoch ms. */
  readonly from: number
  readonly to: number
  readonly weekday: Weekday
}

/** The clock on the wall of one IANA zone. Instants are epoch ms; cheap enough to ask for every reading. */
export interface LocalClock {
  readonly zone: string
  /** Local time less UTC, ms. */
  offsetAt(t: number): number
  /** Minutes since local midnight as the clock on the wall shows them, with fractions; [0, 1440). */
  minuteOfDay(t: number): number
  /** Calendar date as days from 1970-01-01. */
  dayNumber(t: number): number
  weekday(t: number): Weekday
  /** The civil day with this number. */
  day(number: number): LocalDay
  /** The civil days that touch [from, to), in order. */
  days(from: number, to: number): LocalDay[]
  /**
   * The instants of [from, to) at which the clock on the wall shows startMinute or later and is before endMinute
   * (minutes since local midnight, 0 to 1440), on days that the window begins on. A window whose end is not after its
   * start runs past midnight; equal ends are empty. An hour that summer time leaves out is missing from the window, an hour that comes
   * twice is in it twice.
   * @throws {CoreError} out_of_range
   */
  dailySpans(from: number, to: number, startMinute: number, endMinute: number, days?: readonly Weekday[]): Spans
}

/** Offsets of one UTC day: one until `cut`, another from there on. */
interface DayOffsets {
  readonly cut: number
  readonly before: number
  readonly after: number
}

/**
 * The clock of an IANA zone. Asks the zone database only once a day and zone (a zoned calculation costs microseconds)
 * and keeps the answers. Assumes at most one change of the offset within a UTC day.
 * @throws {CoreError} unknown_time_zone
 */
export function localClock(zone: string): LocalClock {
  const lookUp = offsetLookUp(zone)
  const offsetsByDay = new Map<number, DayOffsets>()
  const days = new Map<number, LocalDay>()
  let lastDay = Number.NaN
  let last: DayOffsets = { cut: 0, before: 0, after: 0 }

  const offsetsOf = (utcDay: number): DayOffsets => {
    if (utcDay === lastDay) return last
    let found = offsetsByDay.get(utcDay)
    if (found === undefined) {
      found = dayOffsets(lookUp, utcDay * DAY)
      offsetsByDay.set(utcDay, found)
    }
    lastDay = utcDay
    last = found
    return found
  }
  const offsetAt = (t: number): number => {
    const offsets = offsetsOf(Math.floor(t / DAY))
    return t < offsets.cut ? offsets.before : offsets.after
  }
  const dayNumber = (t: number): number => Math.floor((t + offsetAt(t)) / DAY)
  const startOf = (number: number): number => {
    const date = new Date(number * DAY)
    return new Temporal.PlainDate(date.getUTCFullYear(), date.getUTCMonth() + 1, date.getUTCDate()).toZonedDateTime(
      zone,
    ).epochMilliseconds
  }
  const day = (number: number): LocalDay => {
    let found = days.get(number)
    if (found === undefined) {
      found = { number, from: startOf(number), to: startOf(number + 1), weekday: weekdayOf(number) }
      days.set(number, found)
    }
    return found
  }

  return {
    zone,
    offsetAt,
    dayNumber,
    day,
    minuteOfDay: (t) => {
      const local = t + offsetAt(t)
      return (local - Math.floor(local / DAY) * DAY) / MINUTE
    },
    weekday: (t) => weekdayOf(dayNumber(t)),
    days: (from, to) => {
      const list: LocalDay[] = []
      if (!(from < to)) return list
      for (let d = day(dayNumber(from)); d.from < to; d = day(d.number + 1)) list.push(d)
      return list
    },
    dailySpans: (from, to, startMinute, endMinute, onDays = WEEKDAYS) => {
      const start = minuteWithin(startMinute) % 1440
      const end = minuteWithin(endMinute)
      const windows = start <= end ? [[start, end, 0] as const] : [[start, 1440, 0] as const, [0, end, 1] as const]
      const pairs: [number, number][] = []
      for (let utcDay = Math.floor(from / DAY); utcDay * DAY < to; utcDay++) {
        const { cut, before, after } = offsetsOf(utcDay)
        const bounds = [utcDay * DAY, Math.min(Math.max(cut, utcDay * DAY), (utcDay + 1) * DAY), (utcDay + 1) * DAY]
        for (const [piece, offset] of [before, after].entries()) {
          const a = Math.max(from, bounds[piece]!)
          const b = Math.min(to, bounds[piece + 1]!)
          if (a >= b) continue
          for (let number = Math.floor((a + offset) / DAY); number * DAY - offset < b; number++) {
            for (const [first, past, daysBack] of windows) {
              if (!onDays.includes(weekdayOf(number - daysBack))) continue
              const midnight = number * DAY - offset
              pairs.push([Math.max(a, midnight + first * MINUTE), Math.min(b, midnight + past * MINUTE)])
            }
          }
        }
      }
      return spansOf(pairs)
    },
  }
}

/** Weekday of a calendar date given as days from 1970-01-01, which was a Thursday. */
export function weekdayOf(dayNumber: number): Weekday {
  return WEEKDAYS[(((dayNumber + 3) % 7) + 7) % 7]!
}

function offsetLookUp(zone: string): (t: number) => number {
  const at = (t: number): number =>
    Temporal.Instant.fromEpochMilliseconds(t).toZonedDateTimeISO(zone).offsetNanoseconds / 1e6
  try {
    at(0)
  } catch (error) {
    if (error instanceof RangeError) throw new CoreError('unknown_time_zone', `localClock got "${zone}"`)
    throw error
  }
  return at
}

function dayOffsets(lookUp: (t: number) => number, from: number): DayOffsets {
  const before = lookUp(from)
  const after = lookUp(from + DAY)
  if (before === after) return { cut: from, before, after }
  let low = from
  let high = from + DAY
  while (high - low > 1) {
    const middle = Math.floor((low + high) / 2)
    if (lookUp(middle) === before) low = middle
    else high = middle
  }
  return { cut: high, before, after }
}

function minuteWithin(minute: number): number {
  if (!(minute >= 0 && minute <= 1440)) throw new CoreError('out_of_range', `dailySpans needs 0 to 1440, got ${minute}`)
  return minute
}
