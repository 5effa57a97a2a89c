import { createHash } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { SiteSheet, SwitchingIn, TestIn, TripIn } from '../../../core/contract/index.ts'
import { bakeryWeek } from '../../../core/simulate/bakery.ts'
import { SCENARIOS } from '../../../core/simulate/scenarios/scenarios.ts'
import { simulate } from '../../../core/simulate/simulate.ts'
import { evidenceOf, type Simulated } from '../../../core/simulate/simulated.ts'
import { circuit, load, planOf, START } from './site.ts'

function digest(simulated: Simulated): string {
  const { series, ...records } = simulated
  const hash = createHash('sha256').update(JSON.stringify(records))
  for (const [ref, { t, v }] of series) {
    hash.update(ref)
    for (const column of [t, v]) hash.update(new Uint8Array(column.buffer, column.byteOffset, column.byteLength))
  }
  return hash.digest('hex')
}

/** What the contract asks of records, and the store of series. */
function expectPostable(simulated: Simulated): void {
  expect(SiteSheet.parse(simulated.sheet)).toEqual(simulated.sheet)
  for (const trip of simulated.trips) expect(TripIn.parse(trip)).toEqual(trip)
  for (const switching of simulated.switchings) expect(SwitchingIn.parse(switching)).toEqual(switching)
  for (const test of simulated.tests) expect(TestIn.parse(test)).toEqual(test)
  const channels = new Set(simulated.sheet.channels.map(({ ref }) => ref))
  for (const [ref, { t, v }] of simulated.series) {
    expect(channels.has(ref)).toBe(true)
    expect(t.every((x, i) => Number.isInteger(x) && (i === 0 || x > t[i - 1]!))).toBe(true)
    expect(v.every(Number.isFinite)).toBe(true)
  }
}

/** Outages of one device do not overlap, and what people wrote down holds the true instant. */
function expectHonestTrips({ trips, truth }: Simulated): void {
  for (const [i, { at, restoredAt, rcd }] of truth.trips.entries()) {
    const noted = trips[i]!
    expect(noted.rcd).toBe(rcd)
    if (noted.at === undefined) {
      expect(noted.after).toBeLessThan(at)
      expect(noted.before).toBeGreaterThan(at)
    } else expect(noted.at).toBeGreaterThanOrEqual(at)
    expect(restoredAt).toBeGreaterThan(at)
    const next = truth.trips[i + 1]
    if (next?.rcd === rcd) expect(next.at).toBeGreaterThan(restoredAt)
  }
}

describe('simulate', () => {
  it.each(Object.keys(SCENARIOS))('%s: same seed, same bytes; another seed, others', (kind) => {
    const make = SCENARIOS[kind]!
    const first = make(7)
    expect(digest(make(7))).toBe(digest(first))
    expect(digest(make(8))).not.toBe(digest(first))
    expect(first.truth.kind).toBe(kind)
    expectPostable(first)
    expectHonestTrips(first)
  })

  it('another logger does not change what happens', () => {
    const profile = new Array<number>(24).fill(1)
    const mixer = load('mixer', {
      habit: { kind: 'runs', perDay: 8, profile, minutes: 20, spread: 0.3 },
      fault: { kind: 'when-on', mA: 22, spread: 0.4 },
    })
    const plan = planOf([circuit('1', [mixer], { standing: { g: 0, b: 10 } })], { stepMs: 10_000 })
    const slow = simulate({ ...plan, logger: { ...plan.logger!, intervalMs: 60_000, gaps: [[START, START + 9e7]] } })
    const without = simulate({ ...plan, logger: null })
    // the true budget is kept for logged sites alone
    const { budget, ...happened } = slow.truth
    expect({ ...without.truth, budget }).toEqual({ ...happened, budget })
    expect(without.truth.trips.length).toBeGreaterThan(0)
    expect(without.series.size).toBe(0)
  })

  it('keeps nothing of a gap, clips at full scale, rounds to the resolution', () => {
    const plan = planOf([circuit('1', [], { standing: { g: 0, b: 8.1234 } })])
    const gap = [START + 1e7, START + 2e7] as const
    const read = (more: object): { t: Float64Array; v: Float64Array } =>
      simulate({ ...plan, logger: { ...plan.logger!, ...more } }).series.get('tails-a')!
    expect(read({ gaps: [gap] }).t.some((t) => t >= gap[0] && t < gap[1])).toBe(false)
    expect(new Set(read({ fullScaleMa: 5 }).v)).toEqual(new Set([5]))
    expect(new Set(read({ resolutionMa: 0.1 }).v)).toEqual(new Set([8.1]))
    expect(read({ clockMs: 90_000 }).t[0]).toBe(START + 90_000)
  })

  it('cuts evidence to a span, with records that touch it', () => {
    const week = SCENARIOS['load-when-on']!(3)
    const middle = (week.from + week.to) / 2
    const { series, trips } = evidenceOf(week, 'A', week.from, middle)
    expect(series.get('tails-a')!.t.at(-1)).toBeLessThan(middle)
    expect(trips.length).toBeLessThan(week.trips.length)
    expect(new Set(trips.map(({ id }) => id)).size).toBe(trips.length)
  })
})

describe('the bakery', () => {
  const week = bakeryWeek(START)

  it('has eight to twelve trips, some by interval alone, all of the defrost heater on A', () => {
    const onA = week.truth.trips.filter(({ rcd }) => rcd === 'A')
    expect(onA.length).toBeGreaterThanOrEqual(8)
    expect(onA.length).toBeLessThanOrEqual(12)
    for (const { faults } of onA) expect(faults['load:defrost']).toBeGreaterThan(10)
    expect(week.trips.filter(({ at }) => at === undefined).length).toBeGreaterThanOrEqual(2)
    expect(week.trips.some(({ running }) => running?.includes('load:mixer'))).toBe(true)
  })

  it('suffers in the rain on B, has a breaker off for a day, and can be posted', () => {
    const onB = week.truth.trips.filter(({ rcd }) => rcd === 'B')
    expect(onB.length).toBeGreaterThan(0)
    for (const { faults } of onB) expect(faults.rain).toBeGreaterThan(10)
    expect(week.switchings.map(({ of, on }) => [of, on])).toEqual([
      ['circuit:4', false],
      ['circuit:4', true],
    ])
    expectPostable(week)
    expectHonestTrips(week)
  })

  it('tells the same story whenever it is recorded', () => {
    const other = bakeryWeek(START + 40 * 86_400_000 + 5 * 3_600_000)
    expect(other.truth.trips.map(({ rcd }) => rcd)).toEqual(week.truth.trips.map(({ rcd }) => rcd))
  })
})
