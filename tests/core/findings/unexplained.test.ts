import { describe, expect, it } from 'vitest'
import type { BudgetLine } from '../../../core/contract/findings.ts'
import { followsCurrent } from '../../../core/findings/follows-current.ts'
import { unexplained } from '../../../core/findings/unexplained.ts'
import { seededRandom } from '../../../core/statistics/random.ts'
import { contains } from '../../../core/timeline/spans.ts'
import type { Thing } from '../../../core/timeline/timeline.ts'
import { HOUR, loadOn, MINUTE, START, timelineOf, tripAt } from './timeline-of.ts'

const DAYS = 6
const END = START + DAYS * 24 * HOUR
const minutes = Float64Array.from({ length: DAYS * 1_440 }, (_, i) => START + i * MINUTE)
const line = (of: string, ma: number): BudgetLine => ({
  of,
  ma,
  low: 0.9 * ma,
  high: 1.1 * ma,
  basis: 'switching',
  switchings: 12,
})
/** Runs of `length` hours, one a day at `hour`. */
const daily = (ref: string, hour: number, length: number): Thing =>
  loadOn(
    ref,
    Array.from(
      { length: DAYS },
      (_, d) => [START + (24 * d + hour) * HOUR, START + (24 * d + hour + length) * HOUR] as const,
    ),
    START,
    END,
  )
const oven = daily('oven', 4, 3)

describe('unexplained', () => {
  const timeline = timelineOf({ days: DAYS, things: [oven] })
  const levels = (extra: (t: number) => number) => ({
    t: minutes,
    v: minutes.map((t) => 8 + (contains(oven.state.on, t) ? 5 : 0) + extra(t)),
  })

  it('leaves nothing of what the budget knows', () => {
    const found = unexplained(
      timeline,
      levels(() => 0),
      [line('load:oven', 5)],
      24,
    )
    expect(found.excursions).toHaveLength(0)
    expect(Math.max(...found.remainder.v)).toBeCloseTo(8, 10)
  })

  it('finds what nobody listed, with its height', () => {
    const pump = daily('pump', 15, 0.5)
    const found = unexplained(
      timeline,
      levels((t) => (contains(pump.state.on, t) ? 9 : 0)),
      [line('load:oven', 5)],
      24,
    )
    expect(found.excursions).toHaveLength(2 * DAYS)
    expect(found.heightMa).toBeCloseTo(9, 10)
    expect(found.apart).toBe(DAYS)
    expect(found.follows).toBeNull()
  })

  it('knows excursions that follow the starts of a listed load', () => {
    // the budget has the oven too low: its first twenty minutes leak far more
    const warm = (t: number): number => (oven.changes.some((c) => c.on && t >= c.at && t < c.at + 20 * MINUTE) ? 8 : 0)
    expect(unexplained(timeline, levels(warm), [line('load:oven', 5)], 24).follows).toBe('load:oven')
  })

  it('names the one circuit without which they never came', () => {
    // a pump of circuit 2 that nobody listed, every two hours; circuit 2 was off for a day, circuit 1 for another
    const off = [START + 24 * HOUR, START + 48 * HOUR] as const
    const circuit = (ref: string, from: number): Thing => ({
      ...loadOn(ref, [[START, from] as const, [from + 24 * HOUR, END] as const], START, END),
      of: `circuit:${ref}`,
      kind: 'circuit',
    })
    const things = [circuit('1', START + 72 * HOUR), circuit('2', off[0])]
    const pump = (t: number): number => (t % (2 * HOUR) < 20 * MINUTE && !(t >= off[0] && t < off[1]) ? 9 : 0)
    const v = minutes.map((t) => 8 + pump(t))
    expect(unexplained(timelineOf({ days: DAYS, things }), { t: minutes, v }, [], 24).follows).toBe('circuit:2')
  })

  it('does not count the rise of a trip itself as seen apart', () => {
    const trips = [tripAt(START + 50 * HOUR)]
    const rise = (t: number): number => (t >= trips[0]!.from - 5 * MINUTE && t < trips[0]!.from ? 12 : 0)
    const found = unexplained(
      timelineOf({ days: DAYS, things: [oven], trips }),
      levels(rise),
      [line('load:oven', 5)],
      24,
    )
    expect(found.excursions.length).toBeGreaterThan(0)
    expect(found.apart).toBe(0)
  })
})

describe('followsCurrent', () => {
  const loads = [
    [daily('oven', 4, 3), 14],
    [daily('mixer', 9, 1.5), 5],
    [daily('kettle', 12, 0.6), 9],
    [daily('prover', 16, 4), 3],
    [daily('dryer', 21, 1), 11],
  ] as const
  const things = loads.map(([thing]) => thing)
  const amps = (t: number): number =>
    loads.reduce((sum, [thing, a]) => sum + (contains(thing.state.on, t) ? a : 0), 0.5)
  const random = seededRandom('currents')
  const noise = minutes.map(() => random.normal(0, 0.05))
  const timeline = timelineOf({ days: DAYS, things, loadCurrent: { t: minutes, v: minutes.map(amps) } })

  it('sees a neutral–earth fault: leakage goes with the current, whoever carries it', () => {
    // conductive share k of the load current on 8 mA of capacitive leakage: |I| = √(B² + (kI)²), domain.md, Formulas
    const v = minutes.map((t, i) => Math.hypot(8, 0.9 * amps(t)) + noise[i]!)
    expect(followsCurrent(timeline, { t: minutes, v }, 8, 14)?.follows).toBe(true)
  })

  it('does not take one leaking load for it', () => {
    const v = minutes.map((t, i) => 8 + (contains(loads[1][0].state.on, t) ? 7 : 0) + noise[i]!)
    expect(followsCurrent(timeline, { t: minutes, v }, 8, 14)?.follows).toBe(false)
  })

  it('says nothing without a load current', () => {
    expect(followsCurrent(timelineOf({ things }), { t: minutes, v: minutes.map(() => 8) }, 8, 14)).toBeNull()
  })
})
