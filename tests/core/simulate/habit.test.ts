import { describe, expect, it } from 'vitest'
import { sunElevation } from '../../../core/simulate/daylight.ts'
import { draws } from '../../../core/simulate/draws.ts'
import { type Habit, runsOf, type Setting } from '../../../core/simulate/habit.ts'
import { localClock } from '../../../core/timeline/local-clock.ts'
import { countSpans, eachSpan, totalMs } from '../../../core/timeline/spans.ts'
import { sunTimes } from '../../../core/timeline/sun.ts'

const DAY = 86_400_000
const FROM = Date.UTC(2026, 2, 16)
const setting: Setting = {
  from: FROM,
  to: FROM + 42 * DAY,
  clock: localClock('Europe/Vienna'),
  latitude: 47.3,
  longitude: 13.4,
}
const lived = (habit: Habit, seed = 1): Float64Array => runsOf(habit, setting, draws(seed, 'habit'))

describe('habits', () => {
  it('of people come as often as they say', () => {
    // 42 days × 6 = 252 expected. Exact Poisson quantiles (sums of the probabilities, computed apart in Python): below 180 and above
    // 331 lies less than one seed in a million each.
    const profile = Array.from({ length: 24 }, (_, hour) => (hour >= 6 && hour < 22 ? 1 : 0))
    const spans = lived({ kind: 'runs', perDay: 6, profile, minutes: 5, spread: 0.1 })
    expect(countSpans(spans)).toBeGreaterThanOrEqual(180)
    expect(countSpans(spans)).toBeLessThanOrEqual(331)
    for (const span of eachSpan(spans)) {
      const minute = setting.clock.minuteOfDay(span.from)
      expect(minute).toBeGreaterThanOrEqual(360)
      expect(minute).toBeLessThan(1320)
    }
  })

  it('of a thermostat keep their share of time', () => {
    const spans = lived({ kind: 'cycle', onMinutes: 10, offMinutes: 30, spread: 0.1 })
    // A quarter; 1,512 cycles of 10 % spread leave 0.3 % of chance.
    expect(totalMs(spans) / (42 * DAY)).toBeCloseTo(0.25, 2)
  })

  it('of a time switch stay on the wall clock through the change to summer time', () => {
    // 2026-03-29 is the change in the European Union.
    const starts = [...eachSpan(lived({ kind: 'clock', windows: [[300, 330]], jitter: 0 }))].map((span) => span.from)
    expect(starts).toHaveLength(42)
    expect(new Set(starts.map((t) => setting.clock.minuteOfDay(t)))).toEqual(new Set([300]))
    expect(new Set(starts.map((t) => t % DAY)).size).toBe(2)
  })

  it('of a photocell follow the sunset', () => {
    const dusks = [...eachSpan(lived({ kind: 'dusk', degrees: -0.833 }))].slice(1)
    expect(dusks).toHaveLength(42)
    for (const { from } of dusks) {
      const { sunset } = sunTimes(from, setting.latitude, setting.longitude)
      // Two formulas of different origin for the same event; two minutes are the coarser one's stated error.
      expect(Math.abs(from - sunset!)).toBeLessThan(120_000)
    }
  })
})

describe('sunElevation', () => {
  it('is 90° less the tropic where the sun stands in the zenith at the June solstice', () => {
    // Solstice 2026-06-21 08:25 UTC (Astronomical Almanac); obliquity 23.44°: at 23.44° N the noon sun stands in the zenith.
    const noon = Date.UTC(2026, 5, 21, 12, 2)
    expect(sunElevation(noon, 23.44, 0)).toBeGreaterThan(89.4)
    expect(sunElevation(noon, -66.56, 0)).toBeCloseTo(0, 0)
  })
})
