import { describe, expect, it } from 'vitest'
import { type Preference, preferences } from '../../../../core/findings/preference.ts'
import { habitReason, ratioReason } from '../../../../core/findings/preferring/habit-reason.ts'
import { priorReason, rateReason } from '../../../../core/findings/preferring/rate-reason.ts'
import { habitsOf } from '../../../../core/findings/windows/habits.ts'
import { type Frame, windowOf } from '../../../../core/findings/windows/trip-share.ts'
import { type Spans, spansOf } from '../../../../core/timeline/spans.ts'
import type { TimelineTrip } from '../../../../core/timeline/timeline.ts'
import { HOUR, START, timelineOf, tripAt } from '../timeline-of.ts'

const DAY = 24 * HOUR
const range = (n: number): number[] => Array.from({ length: n }, (_, i) => i)
const daily = (h: number, length: number, days: readonly number[], at = START): Spans =>
  spansOf(days.map((d) => [at + d * DAY + h * HOUR, at + d * DAY + (h + length) * HOUR] as const))

function preferenceOf(days: number, on: Spans, trips: readonly TimelineTrip[], from = START): Preference {
  const timeline = timelineOf({ from, days, trips })
  const habits = habitsOf(timeline, trips)
  const frame: Frame = { timeline, hours: days * 24, trips, habits, kicks: spansOf([]), high: spansOf([]) }
  const window = windowOf(frame, 'on', 'while it ran', 1, on, spansOf([[timeline.from, timeline.to]]))!
  return preferences(frame, [{ of: 'load:oven', window, family: [window] }])[0]!
}

const evening = (days: readonly number[], at = START) =>
  days.map((d) => tripAt(at + d * DAY + 18.05 * HOUR + ((d * 37) % 110) * 60_000))

describe('habit in words', () => {
  it('says that much of it may be habit when the hours of the day explain as much', () => {
    // on in the evening of twelve of fourteen days; trips come on eight evenings, on or not
    const p = preferenceOf(14, daily(18, 2, range(12)), evening([0, 2, 3, 5, 7, 8, 10, 13]))
    expect(p.expected).toBeCloseTo((8 * 24) / 336, 9)
    expect(p.p).toBeLessThan(1e-5)
    const reason = habitReason(p)!
    expect(reason.text).toBe(
      'Much of it may be habit: at the hours of the day at which the trips came, 6.9 of 8 would be expected anyway; there were 7 (p = 0.68).',
    )
    // chances 12/14 each: P(X >= 7) of binomial(8, 6/7) = (6/7)^8 + 8 (1/7) (6/7)^7
    expect(reason.figures.p).toBeCloseTo((6 / 7) ** 8 + (8 / 7) * (6 / 7) ** 7, 5)
  })

  it('says that the time of day does not explain it when it still stands out', () => {
    const p = preferenceOf(14, daily(18, 2, [0, 2, 4, 6]), [
      ...evening([0, 2, 4, 6]),
      tripAt(START + 18.9 * HOUR),
      tripAt(START + 66.4 * HOUR),
    ])
    expect(habitReason(p)!.text).toMatch(
      /^The time of day does not explain it: .* 1\.7 of 6 would be expected; there were 6 \(p = 0\.00054/,
    )
  })

  it('says nothing where the hours make no difference', () => {
    const everyHour = spansOf(range(14 * 24).map((h) => [START + h * HOUR, START + h * HOUR + 600_000] as const))
    expect(habitReason(preferenceOf(14, everyHour, evening([1, 3, 5])))).toBeNull()
  })

  it('says that hours alone explain it when it always held then', () => {
    const p = preferenceOf(14, daily(18, 2, range(14)), evening([1, 3, 5]))
    expect(habitReason(p)!.text).toMatch(
      /^It held at the same hours of the day every time.*switching it at other hours/,
    )
  })

  it('compares the same hour of the same weekday in spans of weeks', () => {
    // Fridays only, on three of four; trips on four Friday evenings
    const p = preferenceOf(28, daily(18, 2, [4, 11, 18]), evening([4, 11, 18, 25]))
    expect(p.crossover).toMatchObject({ strata: 'weekday-hour', inside: 3 })
    expect(p.crossover!.expected).toBeCloseTo(3, 9)
    expect(habitReason(p)!.text).toMatch(/^Much of it may be habit: at the hours of the week/)
    expect(habitReason(p)!.method).toMatch(/Maclure 1991/)
  })

  it('is the same four weeks later, and for trips in any order', () => {
    const days = [0, 2, 3, 5, 7, 8, 10, 13]
    const a = preferenceOf(14, daily(18, 2, range(12)), evening(days))
    const later = START + 28 * DAY
    const b = preferenceOf(14, daily(18, 2, range(12), later), evening(days, later), later)
    expect(habitReason(b)).toEqual(habitReason(a))
    expect(b.pFamily).toBe(a.pFamily)
    const c = preferenceOf(14, daily(18, 2, range(12)), evening([...days].reverse()))
    expect(habitReason(c)!.text).toBe(habitReason(a)!.text)
    expect(c.pFamily).toBe(a.pFamily)
  })
})

describe('a second reason', () => {
  it('gives the ratio of rates with its exact limits', () => {
    const p = preferenceOf(14, daily(18, 2, range(12)), evening([0, 2, 3, 5, 7, 8, 10, 13]))
    // Clopper-Pearson 90 % of 7 in 8: 0.52932 to 0.99361 (Beta(7, 2) and Beta(8, 1) quantiles), as odds times 312 h / 24 h
    expect(ratioReason(p).text).toMatch(/^It held for 24 hours.*between 14\.6 and 2021 times as likely/)
  })

  it('says how well the rate is known', () => {
    // Garwood 90 % for 4: 1.36632 and 9.15352 (chi-squared tables, from memory: 2.733/2 and 18.307/2), in a week
    const found = rateReason(4, 168)
    expect(found.figures.lowAWeek).toBeCloseTo(1.36632, 4)
    expect(found.figures.highAWeek).toBeCloseTo(9.15352, 4)
    expect(rateReason(0, 168).text).toMatch(/^No trips in 7 days under supply leave room for up to 3 a week/)
    expect(rateReason(0, 0).text).toMatch(/No time under supply/)
    expect(priorReason(0.04).text).toMatch(/0\.04/)
  })
})
