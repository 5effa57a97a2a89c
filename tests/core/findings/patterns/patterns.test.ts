import { describe, expect, it } from 'vitest'
import { patterns } from '../../../../core/findings/patterns/patterns.ts'
import { seededRandom } from '../../../../core/statistics/random.ts'
import { seriesOf } from '../../../../core/timeline/series.ts'
import { clip, spansOf } from '../../../../core/timeline/spans.ts'
import type { Timeline } from '../../../../core/timeline/timeline.ts'
import { HOUR, MINUTE, START, timelineOf, tripAt } from '../timeline-of.ts'

const DAYS = 28

function withTrips(hours: readonly number[], given: Partial<Timeline> = {}): Timeline {
  return timelineOf({ days: DAYS, trips: hours.map((h) => tripAt(START + Math.round(h * HOUR))), ...given })
}

/** Trips at random over four weeks. */
function atRandom(seed: number, n = 12): number[] {
  const random = seededRandom(seed)
  return Array.from({ length: n }, () => random.uniform() * DAYS * 24).sort((a, b) => a - b)
}

describe('patterns', () => {
  it('finds a time of day and says it in local time', () => {
    const random = seededRandom('timer')
    const hours = Array.from({ length: 10 }, (_, day) => day * 48 + 3 + random.normal(0, 0.2))
    const found = patterns(withTrips(hours, { sheet: { ...timelineOf({}).sheet, timeZone: 'Europe/Vienna' } }))
    expect(found.clock.p).toBeLessThan(0.001)
    // 03:00 UTC is 05:00 in Vienna's summer time.
    expect(found.clock.localTime).toMatch(/^(04:5|05:0)\d$/)
    expect(found.period.p).toBeLessThan(0.05)
  })

  it('finds a period that no clock keeps', () => {
    const random = seededRandom('defrost')
    const hours = Array.from({ length: 14 }, (_, k) => 5 + 31 * k + random.normal(0, 0.4))
    const found = patterns(withTrips(hours))
    expect(found.period.p).toBeLessThan(0.05)
    // A comb has power at whole fractions of its period too.
    const turns = 31 / Number(found.period.hours)
    expect(Math.abs(turns - Math.round(turns))).toBeLessThan(0.05)
    expect(found.clock.p).toBeGreaterThan(0.05)
  })

  it('cries wolf about one time in twenty at most', () => {
    let clock = 0
    let period = 0
    let sun = 0
    for (let seed = 0; seed < 60; seed++) {
      const found = patterns(withTrips(atRandom(seed)))
      if (found.clock.p! < 0.05) clock++
      if (found.period.p! < 0.05) period++
      if (found.sun.p! < 0.05) sun++
    }
    // Binomial(60, 0.05): 8 or more has a chance of 1.1 %; the seeds are fixed, so this never flickers.
    expect(clock).toBeLessThan(8)
    expect(period).toBeLessThan(8)
    expect(sun).toBeLessThan(8)
  })

  it('is not fooled by supply that is there at night only', () => {
    const nights = spansOf(
      Array.from({ length: DAYS }, (_, d) => [START + d * 24 * HOUR, START + (d * 24 + 6) * HOUR] as const),
    )
    let alarms = 0
    for (let seed = 0; seed < 40; seed++) {
      const random = seededRandom(seed)
      const hours = Array.from({ length: 12 }, () => 24 * random.integer(DAYS) + 6 * random.uniform()).sort(
        (a, b) => a - b,
      )
      if (patterns(withTrips(hours, { energised: nights })).clock.p! < 0.05) alarms++
    }
    expect(alarms).toBeLessThan(7)
  })

  it('sees trips that follow the rain', () => {
    const random = seededRandom('rain')
    const wetDays = [2, 7, 8, 13, 19, 24]
    const t = Array.from({ length: DAYS * 24 }, (_, h) => START + h * HOUR)
    const rain = seriesOf(
      t,
      t.map((_ms, h) => (wetDays.includes(Math.floor(h / 24)) && h % 24 < 5 ? 3 : 0)),
    )
    const hours = wetDays.flatMap((d) => [d * 24 + 2 + random.uniform() * 4, d * 24 + 7 + random.uniform() * 3])
    const found = patterns(withTrips(hours, { rain }))
    expect(found.rain.p).toBeLessThan(0.001)
    expect(found.rain.verdict).toMatch(/^More trips than chance: (1[012]|ten) trips of 12 fell in wet hours/)
    expect(found.temperature).toEqual({ verdict: 'No temperature is logged.', p: null })
  })

  it('says that five trips are the least, and leaves vague ones out', () => {
    expect(patterns(withTrips([1, 50, 99, 200])).clock).toEqual({
      verdict: 'Too few trips with a known time to say.',
      p: null,
    })
    const vague = [1, 50, 99, 200, 300].map((h) => tripAt(START + h * HOUR, START + h * HOUR + 40 * MINUTE))
    expect(patterns(timelineOf({ days: DAYS, trips: vague })).clock.p).toBeNull()
  })

  it('gives the same answer for the same trips', () => {
    const timeline = withTrips(atRandom(5))
    expect(patterns(timeline)).toEqual(
      patterns({ ...timeline, energised: clip(timeline.energised, START, timeline.to) }),
    )
  })
})
