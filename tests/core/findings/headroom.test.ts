import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { headroom } from '../../../core/findings/headroom.ts'
import { heldLevels, heldQuantile } from '../../../core/findings/standing.ts'
import { seededRandom } from '../../../core/statistics/random.ts'
import { seriesOf } from '../../../core/timeline/series.ts'
import { spansOf } from '../../../core/timeline/spans.ts'
import { HOUR, MINUTE, START, timelineOf, tripAt } from './timeline-of.ts'

interface Case {
  readonly name: string
  readonly input: { readonly x: readonly number[]; readonly p: readonly number[] }
  readonly expected: { readonly type8: readonly number[] }
}

// R 4.2.2 quantile(type = 8); Hyndman & Fan (1996). See fixtures/reference/README.md.
const { cases } = JSON.parse(
  readFileSync(new URL('../../../fixtures/reference/quantiles.json', import.meta.url), 'utf8'),
) as { readonly cases: readonly Case[] }

describe('heldQuantile', () => {
  it.each(cases.filter((c) => c.input.x.length > 0).map((c) => [c.name, c] as const))(
    'is type 8 for a regular logger: %s',
    (_, { input, expected }) => {
      const t = input.x.map((_x, i) => START + i * 1_000)
      const levels = heldLevels(seriesOf(t, input.x), spansOf([[START - 1_000, START + input.x.length * 1_000]]))
      input.p.forEach((p, k) => {
        const truth = expected.type8[k]!
        expect(Math.abs(heldQuantile(levels, p) - truth)).toBeLessThanOrEqual(1e-8 * Math.max(1, Math.abs(truth)))
      })
    },
  )

  it('is not distorted by a logger that speeds up near events', () => {
    const t: number[] = []
    const v: number[] = []
    for (let s = 0; s < 6 * 3_600; s += 60) {
      // Ten minutes of 20 mA at 1 Hz in six hours of 8 mA at one a minute.
      const event = s >= 3_600 && s < 4_200
      for (let k = 0; k < (event ? 60 : 1); k++) {
        t.push(START + (s + k) * 1_000)
        v.push(event ? 20 : 8)
      }
    }
    const levels = heldLevels(seriesOf(t, v), spansOf([[START, START + 6 * HOUR]]))
    expect(heldQuantile(levels, 0.5)).toBe(8)
    expect(heldQuantile(levels, 0.95)).toBe(8)
    expect(levels.max).toBe(20)
  })

  it('is near the exact one when a log has too many different values to keep', () => {
    const random = seededRandom('many values')
    const v = Float64Array.from({ length: 30_000 }, () => 8 + random.normal())
    const t = Float64Array.from(v, (_, i) => START + i * 1_000)
    const levels = heldLevels(seriesOf(t, v), spansOf([[START, START + 30_000_000]]))
    const sorted = v.slice().sort()
    for (const p of [0.05, 0.5, 0.95]) {
      // A bin is the range over 65,535; two neighbours in it.
      expect(Math.abs(heldQuantile(levels, p) - sorted[Math.round(p * 30_000)]!)).toBeLessThan(1e-3)
    }
    expect(levels.max).toBe(sorted.at(-1))
  })
})

describe('headroom', () => {
  const hours = (level: (h: number) => number, length = 24) => {
    const t = Array.from({ length: length * 60 }, (_, i) => START + i * MINUTE)
    return seriesOf(
      t,
      t.map((ms) => level((ms - START) / HOUR)),
    )
  }

  it('leaves out time without supply', () => {
    const energised = spansOf([
      [START, START + 12 * HOUR],
      [START + 18 * HOUR, START + 24 * HOUR],
    ])
    const leakage = hours((h) => (h >= 12 && h < 18 ? 0 : 9))
    expect(headroom(timelineOf({ days: 1, energised, leakage })).standingMa).toEqual({ p5: 9, p50: 9, p95: 9, max: 9 })
  })

  it('says by the limits of the standards what nobody measured', () => {
    const found = headroom(timelineOf({ days: 1 }))
    expect(found.tripMa).toEqual({ value: 22.5, low: 15, high: 30, basis: 'limits' })
    expect(found).toMatchObject({ standingMa: null, shareOfRating: null, advisedShare: 0.3 })
  })

  it('takes ramp tests before anything else', () => {
    const ramp = (tripMa: number, id: string) => ({ id, kind: 'ramp' as const, rcd: 'A', tripMa, at: START })
    const found = headroom(timelineOf({ days: 1, tests: [ramp(23.5, '1'), ramp(21, '2'), ramp(22, '3')] }))
    expect(found.tripMa).toMatchObject({ value: 22, low: 20.9, high: 23.5, basis: 'ramp-tests' })
    const one = headroom(timelineOf({ days: 1, tests: [ramp(20, '1')] }))
    expect(one.tripMa).toMatchObject({ value: 20, low: 19, high: 21 })
  })

  it('takes levels at trips as lower bounds, from three on', () => {
    // The level climbs over fifty minutes before every sixth hour's trip.
    const at = [6, 12, 18].map((h) => START + h * HOUR)
    const top = [21, 22, 21.5]
    const leakage = hours((h) => {
      const left = 6 - (h % 6)
      const climb = left < 5 / 6 && h < 18 ? 1 - left / (5 / 6) : 0
      return 8 + climb * ((top[Math.floor(h / 6)] ?? 8) - 8)
    })
    const timeline = timelineOf({ days: 1, leakage, trips: at.map((t) => tripAt(t)) })
    const found = headroom(timeline).tripMa
    expect(found.basis).toBe('levels-at-trips')
    expect(found.low).toBeGreaterThan(21)
    expect(found.low).toBeLessThan(22)
    expect(found.value).toBeGreaterThanOrEqual(found.low)
    expect(found.high).toBeLessThanOrEqual(30)
    expect(headroom({ ...timeline, trips: timeline.trips.slice(0, 2) }).tripMa.basis).toBe('limits')
  })

  it('does not care in which order ramp tests were entered', () => {
    const ramp = (tripMa: number) => ({ id: `${tripMa}`, kind: 'ramp' as const, rcd: 'A', tripMa, at: START })
    const tests = [19, 25, 21, 22].map(ramp)
    expect(headroom(timelineOf({ days: 1, tests: [...tests].reverse() }))).toEqual(
      headroom(timelineOf({ days: 1, tests })),
    )
  })
})

describe('drift', () => {
  const wander = (seed: number, maPerDay: number) => {
    const random = seededRandom(seed)
    const t = Array.from({ length: 10 * 24 * 12 }, (_, i) => START + i * 5 * MINUTE)
    let level = 0
    const v = t.map((ms) => {
      // Ornstein–Uhlenbeck with three hours and 0.3 mA.
      level = level * Math.exp(-1 / 36) + random.normal(0, 0.3 * Math.sqrt(1 - Math.exp(-1 / 18)))
      return 8 + level + (maPerDay * (ms - START)) / (24 * HOUR)
    })
    return timelineOf({ days: 10, leakage: seriesOf(t, v), logged: spansOf([[START, START + 10 * 24 * HOUR]]) })
  }

  it('finds a slope and covers it about nine times in ten', () => {
    let covered = 0
    for (let seed = 0; seed < 60; seed++) {
      const drift = headroom(wander(seed, 0.2)).drift!
      if (drift.low <= 0.2 && 0.2 <= drift.high) covered++
      if (seed === 0) expect(drift.p).toBeLessThan(0.01)
    }
    // Binomial(60, 0.9): below 46 has a chance of 0.2 %.
    expect(covered).toBeGreaterThanOrEqual(46)
  })

  it('rarely sees one in a level that only wanders', () => {
    let alarms = 0
    for (let seed = 100; seed < 160; seed++) if (headroom(wander(seed, 0)).drift!.p < 0.05) alarms++
    // Binomial(60, 0.05): 9 or more has a chance of 0.4 %.
    expect(alarms).toBeLessThan(9)
  })

  it('needs a day', () => {
    const t = Array.from({ length: 20 * 60 }, (_, i) => START + i * MINUTE)
    const short = timelineOf({
      days: 1,
      leakage: seriesOf(
        t,
        t.map(() => 8),
      ),
      logged: spansOf([[START, START + 20 * HOUR]]),
    })
    expect(headroom(short).drift).toBeNull()
  })
})
