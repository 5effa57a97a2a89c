import { describe, expect, it } from 'vitest'
import { shiftFamily } from '../../../../core/findings/preferring/shift-family.ts'
import { seededRandom } from '../../../../core/statistics/random.ts'
import { type Spans, spansOf } from '../../../../core/timeline/spans.ts'
import { HOUR, MINUTE, START } from '../timeline-of.ts'

const DAYS = 14
const END = START + DAYS * 24 * HOUR
const energised = spansOf([[START, END]])

function runs(random: ReturnType<typeof seededRandom>, n: number, minutes: number): Spans {
  return spansOf(
    Array.from({ length: n }, () => {
      const at = START + random.uniform() * (END - START - HOUR)
      return [at, at + minutes * MINUTE] as const
    }),
  )
}

const at = (t: number) => ({ from: Math.floor(t), to: Math.floor(t) })

describe('shiftFamily', () => {
  it('finds a window that holds every trip, at the least p that the shifts allow', () => {
    const random = seededRandom('found')
    const guilty = runs(random, 40, 20)
    const trips = Array.from({ length: 9 }, (_, i) => at(guilty[8 * i]! + 5 * MINUTE))
    const innocent = Array.from({ length: 10 }, () => runs(random, 40, 20))
    const p = shiftFamily(
      energised,
      trips,
      [{ of: 'guilty', windows: [guilty] }, ...innocent.map((w, i) => ({ of: `other-${i}`, windows: [w] }))],
      'seed',
    )
    expect(p.get('guilty')).toBeCloseTo(1 / 1000, 9)
    for (let i = 0; i < innocent.length; i++) expect(p.get(`other-${i}`)).toBeGreaterThan(0.05)
  })

  it('pays for every window that is tried: by chance the best p is below 0.1 in one of ten sites', () => {
    // 150 sites of trips at random, twenty windows each: the number of false alarms is binomial(150, 0.1), 99.9 % within 5 … 28.
    let alarms = 0
    for (let site = 0; site < 150; site++) {
      const random = seededRandom(`site ${site}`)
      const trips = Array.from({ length: 8 }, () => at(START + random.uniform() * (END - START)))
      const families = Array.from({ length: 20 }, (_, i) => ({ of: `${i}`, windows: [runs(random, 10 + 5 * i, 30)] }))
      const best = Math.min(...shiftFamily(energised, trips, families, `${site}`).values())
      if (best <= 0.1) alarms++
    }
    expect(alarms).toBeGreaterThanOrEqual(5)
    expect(alarms).toBeLessThanOrEqual(28)
  })

  it('keeps the rhythm of both: trips in a bunch fall into one long run together by chance', () => {
    const long = spansOf([[START + 24 * HOUR, START + 72 * HOUR]])
    const bunch = Array.from({ length: 6 }, (_, i) => at(START + 30 * HOUR + i * HOUR))
    const p = shiftFamily(energised, bunch, [{ of: 'long', windows: [long] }], 'seed').get('long')!
    // The bunch lies inside in (48 - 5) of 336 h of shifts, against (1/7)^6 for trips one by one.
    expect(p).toBeGreaterThan(0.09)
    expect(p).toBeLessThan(0.18)
  })

  it('gives the same for trips and windows in any order, and nothing without trips', () => {
    const random = seededRandom('order')
    const a = runs(random, 30, 30)
    const b = runs(random, 50, 10)
    const trips = Array.from({ length: 7 }, () => at(START + random.uniform() * (END - START)))
    const night = { from: START + 22 * HOUR, to: START + 30 * HOUR }
    const one = shiftFamily(
      energised,
      [...trips, night],
      [
        { of: 'a', windows: [a, b] },
        { of: 'b', windows: [b] },
      ],
      's',
    )
    const other = shiftFamily(
      energised,
      [night, ...trips],
      [
        { of: 'b', windows: [b] },
        { of: 'a', windows: [b, a] },
      ],
      's',
    )
    expect(other.get('a')).toBeCloseTo(one.get('a')!, 9)
    expect(other.get('b')).toBeCloseTo(one.get('b')!, 9)
    expect(shiftFamily(energised, [], [{ of: 'a', windows: [a] }], 's').size).toBe(0)
  })
})
