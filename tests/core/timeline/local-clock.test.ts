import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { localClock, WEEKDAYS, type Weekday } from '../../../core/timeline/local-clock.ts'
import { contains, totalMs } from '../../../core/timeline/spans.ts'

const M = 60_000
const H = 3_600_000
const D = 86_400_000

// Both changes of 2026 in three zones (tz database): Lord Howe Island shifts by 30 minutes only.
const CHANGES = [
  { zone: 'Europe/Vienna', spring: '2026-03-29', autumn: '2026-10-25', shift: 60 },
  { zone: 'America/New_York', spring: '2026-03-08', autumn: '2026-11-01', shift: 60 },
  { zone: 'Australia/Lord_Howe', spring: '2026-10-04', autumn: '2026-04-05', shift: 30 },
]

/** What the platform's own calendar says, by another road: formatted text. */
const formatter = (zone: string): ((t: number) => { date: number; minute: number; weekday: string }) => {
  const format = new Intl.DateTimeFormat('en-GB', {
    timeZone: zone,
    hourCycle: 'h23',
    year: 'numeric',
    month: '2-digit',
    day: '2-digit',
    hour: '2-digit',
    minute: '2-digit',
    second: '2-digit',
    weekday: 'short',
  })
  return (t) => {
    const p = Object.fromEntries(format.formatToParts(t).map((part) => [part.type, part.value]))
    return {
      date: Date.UTC(Number(p.year), Number(p.month) - 1, Number(p.day)) / D,
      minute: Number(p.hour) * 60 + Number(p.minute) + Number(p.second) / 60,
      weekday: String(p.weekday).toLowerCase(),
    }
  }
}

describe.each(CHANGES)('the clock of $zone', ({ zone, spring, autumn, shift }) => {
  const clock = localClock(zone)
  const byPlatform = formatter(zone)
  const near = fc
    .tuple(fc.constantFrom(Date.parse(spring), Date.parse(autumn)), fc.integer({ min: -2 * 86_400, max: 2 * 86_400 }))
    .map(([day, s]) => day + s * 1_000)

  it('shows what the platform formats, across both changes', () => {
    fc.assert(
      fc.property(near, (t) => {
        const wanted = byPlatform(t)
        expect(clock.minuteOfDay(t)).toBeCloseTo(wanted.minute, 6)
        expect(clock.dayNumber(t)).toBe(wanted.date)
        expect(clock.weekday(t)).toBe(wanted.weekday)
      }),
      { numRuns: 300 },
    )
  })

  it('has days that hold their instants and join without a gap', () => {
    fc.assert(
      fc.property(near, (t) => {
        const day = clock.day(clock.dayNumber(t))
        expect(day.from <= t && t < day.to).toBe(true)
        expect(clock.day(day.number + 1).from).toBe(day.to)
        expect(clock.minuteOfDay(day.from)).toBe(0)
      }),
    )
    const length = (date: string): number => {
      const day = clock.day(Date.parse(date) / D)
      return (day.to - day.from) / M
    }
    expect([length(spring), length(autumn)]).toEqual([1440 - shift, 1440 + shift])
  })

  it('keeps a timer at 02:00 to 05:00 local, the missing hour missing and the doubled one doubled', () => {
    for (const [date, lost] of [
      [spring, shift],
      [autumn, -shift],
    ] as const) {
      const day = clock.day(Date.parse(date) / D)
      // On Lord Howe Island the doubled half hour is 01:30 to 02:00: a timer from 01:00 holds both changes everywhere.
      const spans = clock.dailySpans(day.from - D, day.to + D, 60, 300)
      const total = totalMs(spans) / M
      // In New York the autumn change doubles 01:00 to 02:00, in Vienna 02:00 to 03:00: inside 01:00 to 05:00 all.
      expect(total).toBe(3 * 240 - lost)
    }
  })

  it('gives exactly the instants at which the wall shows the window', () => {
    const minute = fc.integer({ min: 0, max: 1440 })
    const days = fc.subarray([...WEEKDAYS], { minLength: 1 })
    fc.assert(
      fc.property(near, minute, minute, days, (t, start, end, on: Weekday[]) => {
        const spans = clock.dailySpans(t - 3 * H, t + 30 * H, start, end, on)
        for (let at = t - 3 * H; at < t + 30 * H; at += 17 * M) {
          const wall = byPlatform(at)
          const s = start % 1440
          const [from, day] = s <= end ? [s, wall.date] : wall.minute >= s ? [s, wall.date] : [0, wall.date - 1]
          const to = s <= end ? end : wall.minute >= s ? 1440 : end
          const weekday = WEEKDAYS[(day + 3) % 7]!
          expect(contains(spans, at)).toBe(wall.minute >= from && wall.minute < to && on.includes(weekday))
        }
      }),
      { numRuns: 40 },
    )
  })
})

describe('localClock', () => {
  it('keeps 02:00 to 05:00 in Vienna two hours long in spring and four in autumn', () => {
    const clock = localClock('Europe/Vienna')
    const hours = (date: string): number => {
      const { from, to } = clock.day(Date.parse(date) / D)
      return totalMs(clock.dailySpans(from, to, 120, 300)) / H
    }
    expect(['2026-03-28', '2026-03-29', '2026-10-25'].map(hours)).toEqual([3, 2, 4])
  })

  it('runs a window past midnight on the day it begins', () => {
    const clock = localClock('UTC')
    const friday = Date.UTC(2026, 8, 25)
    const spans = clock.dailySpans(friday - D, friday + 3 * D, 22 * 60, 6 * 60, ['fri'])
    expect([...spans].map((t) => (t - friday) / H)).toEqual([22, 30])
  })

  it('lists the days that touch a span', () => {
    const clock = localClock('Europe/Vienna')
    const days = clock.days(Date.parse('2026-10-24T12:00Z'), Date.parse('2026-10-26T12:00Z'))
    expect(days.map((d) => [d.weekday, (d.to - d.from) / H])).toEqual([
      ['sat', 24],
      ['sun', 25],
      ['mon', 24],
    ])
    expect(clock.days(5, 5)).toEqual([])
  })

  it('refuses a zone that the database does not know, and minutes outside the day', () => {
    expect(() => localClock('Nowhere/Atoll')).toThrow(expect.objectContaining({ code: 'unknown_time_zone' }))
    expect(() => localClock('UTC').dailySpans(0, D, -1, 5)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})
