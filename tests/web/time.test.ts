import { describe, expect, it } from 'vitest'
import { duration, hours } from '../../web/format/duration.ts'
import { siteClock } from '../../web/format/site-clock.ts'
import { ticksOf } from '../../web/strip/ticks.ts'

const HOUR = 3_600_000

// Both changes of the hour in Vienna in 2026: 29 March 02:00 -> 03:00 and 25 October 03:00 -> 02:00 (EU directive
// 2000/84/EC: last Sundays of March and October at 01:00 UTC).
describe('siteClock', () => {
  const clock = siteClock('Europe/Vienna')

  it('knows days of 23 and 25 hours', () => {
    const march = clock.midnight(Date.UTC(2026, 2, 29, 12))
    const october = clock.midnight(Date.UTC(2026, 9, 25, 12))
    expect((clock.midnight(march, 1) - march) / HOUR).toBe(23)
    expect((clock.midnight(october, 1) - october) / HOUR).toBe(25)
  })

  it('takes the first of a doubled hour, and the moment after a hole', () => {
    const at = (month: number, day: number) => clock.instant({ year: 2026, month, day, hour: 2, minute: 30, second: 0 })
    expect(at(10, 25)).toBe(Date.UTC(2026, 9, 25, 0, 30))
    expect([Date.UTC(2026, 2, 29, 0, 30), Date.UTC(2026, 2, 29, 1, 30)]).toContain(at(3, 29))
  })

  it.each(['Europe/Vienna', 'America/St_Johns', 'Australia/Lord_Howe', 'Pacific/Kiritimati'])(
    'reads back what it writes in %s, hour by hour over a year',
    (zone) => {
      const local = siteClock(zone)
      for (let t = Date.UTC(2026, 0, 1); t < Date.UTC(2027, 0, 1); t += 7 * HOUR) {
        const back = local.instant(local.wall(t))
        // In a doubled hour the first instant is given back.
        expect([0, HOUR, HOUR / 2]).toContain(t - back)
      }
    },
  )
})

describe('ticksOf', () => {
  const clock = siteClock('Europe/Vienna')

  it('stays on round wall times across the change to winter time', () => {
    const from = clock.midnight(Date.UTC(2026, 9, 24, 12))
    const ticks = ticksOf({ from, to: from + 49 * HOUR }, clock, 10)
    expect(ticks.map((tick) => tick.text)).toEqual([
      'Sat 24 Oct',
      '06:00',
      '12:00',
      '18:00',
      'Sun 25 Oct',
      '06:00',
      '12:00',
      '18:00',
      'Mon 26 Oct',
    ])
  })

  it('holds at most as many as asked for, in order, within the view', () => {
    for (const span of [20_000, 4 * 60_000, HOUR, 9 * HOUR, 30 * HOUR, 7 * 24 * HOUR, 400 * 24 * HOUR]) {
      const view = { from: Date.UTC(2026, 2, 27, 5, 17, 3), to: Date.UTC(2026, 2, 27, 5, 17, 3) + span }
      const ticks = ticksOf(view, clock, 8)
      expect(ticks.length).toBeGreaterThan(0)
      expect(ticks.length).toBeLessThanOrEqual(9)
      ticks.forEach((tick, i) => {
        expect(tick.at).toBeGreaterThanOrEqual(view.from)
        expect(tick.at).toBeLessThanOrEqual(view.to)
        if (i > 0) expect(tick.at).toBeGreaterThan(ticks[i - 1]!.at)
      })
    }
  })
})

describe('lengths of time in words', () => {
  it.each([
    [45_000, '45 s'],
    [12 * 60_000, '12 min'],
    [3 * HOUR + 20 * 60_000, '3 h 20 min'],
    [52 * HOUR, '2 days 4 h'],
    [24 * 7 * HOUR, '7 days'],
  ])('%d', (ms, text) => {
    expect(duration(ms).replaceAll('\u00a0', ' ')).toBe(text)
  })

  it('says small hours with a decimal', () => {
    expect(hours(0.5).replaceAll('\u00a0', ' ')).toBe('0.5 h')
  })
})
