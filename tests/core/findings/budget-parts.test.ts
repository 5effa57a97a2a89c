import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { combined, type Source } from '../../../core/findings/budget/combine.ts'
import { budget } from '../../../core/findings/budget.ts'
import { seededRandom } from '../../../core/statistics/random.ts'
import { type Series, seriesOf } from '../../../core/timeline/series.ts'
import { spansOf } from '../../../core/timeline/spans.ts'
import type { Thing, Timeline } from '../../../core/timeline/timeline.ts'
import { HOUR, loadOn, MINUTE, START, timelineOf } from './timeline-of.ts'

const DAY = 24 * HOUR
const runs = (days: number, from: number, hours: number): (readonly [number, number])[] =>
  Array.from(
    { length: days },
    (_, d) => [START + d * DAY + from * HOUR, START + d * DAY + (from + hours) * HOUR] as const,
  )

function minuteSeries(days: number, level: (t: number) => number, seed = 'parts'): Series {
  const random = seededRandom(seed)
  const t = Array.from({ length: days * 24 * 60 }, (_, i) => START + i * MINUTE)
  return seriesOf(
    t,
    t.map((at) => level(at) + random.normal(0, 0.01)),
  )
}

const isOn = ({ state: { on } }: Thing, t: number): boolean => {
  for (let i = 0; i < on.length; i += 2) if (t >= on[i]! && t < on[i + 1]!) return true
  return false
}

describe('both parts of a current', () => {
  const oven = loadOn('oven', runs(7, 6, 3), START, START + 7 * DAY)
  const conductive = minuteSeries(7, (t) => (isOn(oven, t) ? 5 : 0), 'g')
  const capacitive = minuteSeries(7, () => 12, 'b')
  const v = conductive.v.map((g, i) => Math.hypot(g, capacitive.v[i]!))
  const given = {
    days: 7,
    things: [oven],
    leakage: { t: conductive.t, v },
    logged: spansOf([[START, START + 7 * DAY]]),
  }

  it('are told apart where both are logged: 5 mA conductive on 12 mA capacitive read 13', () => {
    // worked example of domain.md, Formulas: √(5² + 12²) = 13, a rise of 1 mA
    const [line] = budget(timelineOf({ ...given, conductive, capacitive }))
    expect(line!.ma).toBeCloseTo(1, 1)
    expect(line!.conductiveMa).toBeCloseTo(5, 1)
    expect(line!.capacitiveMa).toBeCloseTo(0, 1)
    expect(line!.ownLow!).toBeLessThan(5)
    expect(line!.ownHigh!).toBeGreaterThan(5)
    expect(line!.ownHigh! - line!.ownLow!).toBeLessThan(0.5)
  })

  it('are only bounded where magnitudes are: |a − b| ≤ own ≤ a + b of the levels with it and without', () => {
    const [line] = budget(timelineOf(given))
    expect(line!.ma).toBeCloseTo(1, 1)
    expect(line!.conductiveMa).toBeUndefined()
    // 13 − 12 and 13 + 12
    expect(line!.ownLow!).toBeGreaterThan(0.8)
    expect(line!.ownLow!).toBeLessThan(1)
    expect(line!.ownHigh!).toBeGreaterThan(25)
    expect(line!.ownHigh!).toBeLessThan(25.2)
  })
})

describe('combined', () => {
  const source = (basis: Source['basis'], ma: number, error: number, freedom = 1e6): Source => ({
    basis,
    ma,
    error,
    freedom,
  })

  it('weighs agreeing sources by their errors', () => {
    // weights 1 and 4: (2 + 4 × 2.5) / 5 = 2.4; standard error 1/√5, times 1.645
    const both = combined([source('survey', 2, 1), source('switching', 2.5, 0.5)])
    expect(both.ma).toBeCloseTo(2.4, 10)
    expect(both.half).toBeCloseTo(1.6449 / Math.sqrt(5), 4)
    expect(both.basis).toBe('switching')
    expect(both.disagree).toBe(false)
  })

  it('widens until disagreeing ones are as far apart as their errors say', () => {
    // Paule & Mandel (1982), by hand: two values 0 and 10 of error 1 want (5² + 5²) / (1 + b) = 1, so b = 49
    const both = combined([source('survey', 0, 1), source('switching', 10, 1)])
    expect(both.ma).toBeCloseTo(5, 8)
    expect(both.half).toBeCloseTo(1.6449 * Math.sqrt(50 / 2), 2)
    expect(both.disagree).toBe(true)
  })

  it('does not depend on their order, scales, and lies between them', () => {
    const one = fc.record({
      ma: fc.double({ min: -5, max: 20, noNaN: true }),
      error: fc.double({ min: 0.01, max: 3, noNaN: true }),
    })
    fc.assert(
      fc.property(one, one, fc.double({ min: 0.1, max: 10, noNaN: true }), (a, b, times) => {
        const [x, y] = [source('survey', a.ma, a.error, 9), source('switching', b.ma, b.error, 5)]
        const both = combined([x, y])
        const turned = combined([y, x])
        expect(turned.ma).toBeCloseTo(both.ma, 6)
        expect(turned.half).toBeCloseTo(both.half, 6)
        const scaled = combined([x, y].map((s) => ({ ...s, ma: times * s.ma, error: times * s.error })))
        expect(scaled.ma).toBeCloseTo(times * both.ma, 5)
        expect(both.ma).toBeGreaterThanOrEqual(Math.min(a.ma, b.ma) - 1e-9)
        expect(both.ma).toBeLessThanOrEqual(Math.max(a.ma, b.ma) + 1e-9)
      }),
    )
  })
})

describe('further evidence', () => {
  const lamp = loadOn('lamp', [[START, START + 3.5 * DAY]], START, START + 7 * DAY)
  const level = (t: number): number => 8 + (isOn(lamp, t) ? 2 : 0)
  const whole = minuteSeries(7, level)
  const keep = (from: number, to: number): Series => {
    const at = [...whole.t.keys()].filter((i) => whole.t[i]! < from || whole.t[i]! >= to)
    return { t: Float64Array.from(at, (i) => whole.t[i]!), v: Float64Array.from(at, (i) => whole.v[i]!) }
  }
  const gap = [START + 3 * DAY, START + 4 * DAY] as const
  const timeline: Timeline = timelineOf({
    days: 7,
    things: [lamp],
    leakage: keep(...gap),
    logged: spansOf([
      [START, gap[0]],
      [gap[1], START + 7 * DAY],
    ]),
  })

  it('falls back on levels where the switching itself was not logged, and says so', () => {
    const [line] = budget(timeline)
    expect(line!.fallback).toBe(true)
    expect(line!.ma).toBeCloseTo(2, 1)
    expect(line!.note).toMatch(/weather and habit do not cancel/)
    expect(line!.switchings).toBe(0)
  })

  it('weighs a survey together with the log, and says when they disagree', () => {
    const oven = loadOn('oven', runs(7, 6, 3), START, START + 7 * DAY)
    const leakage = minuteSeries(7, (t) => 8 + (isOn(oven, t) ? 2 : 0))
    const survey = (rise: number): Timeline =>
      timelineOf({
        days: 7,
        things: [oven],
        leakage,
        logged: spansOf([[START, START + 7 * DAY]]),
        tests: [
          { id: '1', kind: 'clamp', rcd: 'A', ma: 8 + rise, off: [], at: START + HOUR },
          { id: '2', kind: 'clamp', rcd: 'A', ma: 8, off: ['load:oven'], at: START + 1.2 * HOUR },
        ],
      })
    const [agreeing] = budget(survey(2.05))
    expect(agreeing!.sources?.map(({ basis }) => basis).sort()).toEqual(['survey', 'switching'])
    expect(agreeing!.disagree).toBeUndefined()
    expect(agreeing!.ma).toBeCloseTo(2, 1)
    const [apart] = budget(survey(6))
    expect(apart!.disagree).toBe(true)
    expect(apart!.low!).toBeLessThan(2)
    expect(apart!.high!).toBeGreaterThan(6)
  })

  it('says of a circuit whose breaker opens the line only that its neutral stays', () => {
    const oven = { ...loadOn('7', runs(7, 6, 3), START, START + 7 * DAY), of: 'circuit:7', kind: 'circuit' as const }
    const leakage = minuteSeries(7, (t) => 8 + (isOn(oven, t) ? 2 : 0))
    const logged = spansOf([[START, START + 7 * DAY]])
    const lineFor = (isolation: Thing['isolation']) =>
      budget(timelineOf({ days: 7, things: [{ ...oven, isolation }], leakage, logged }))[0]!
    expect(lineFor('single-pole').neutralStays).toBe(true)
    expect(lineFor('single-pole').note).toMatch(/neutral/)
    expect(lineFor('two-pole').neutralStays).toBeUndefined()
  })
})
