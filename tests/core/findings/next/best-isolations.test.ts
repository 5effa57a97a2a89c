import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { CauseSet } from '../../../../core/findings/likely-sets.ts'
import { bestIsolations } from '../../../../core/findings/next/best-isolations.ts'
import { casesOf, isolations, type Site } from '../../../../core/findings/next/isolations.ts'
import { gammaPoisson } from '../../../../core/statistics/gamma-poisson.ts'
import type { Thing } from '../../../../core/timeline/timeline.ts'
import { HOUR, loadOn, START, timelineOf } from '../timeline-of.ts'

const END = START + 168 * HOUR
const load = (ref: string, circuit: string): Thing => ({ ...loadOn(ref, [], START, END), circuit })
const circuit = (ref: string, isolation: Thing['isolation'] = 'single-pole'): Thing => ({
  ...loadOn(ref, [[START, END]], START, END),
  of: `circuit:${ref}`,
  kind: 'circuit',
  circuit: ref,
  isolation,
})

function siteOf(things: readonly Thing[], given: Partial<Site> = {}): Site {
  return {
    timeline: timelineOf({ things }),
    things: new Map(things.map((t) => [t.of, t])),
    circuits: things.filter((t) => t.kind === 'circuit').map((t) => t.ref),
    standing: new Map(),
    carriers: new Map(),
    ...given,
  }
}

const bakery = siteOf([
  circuit('1'),
  load('mixer', '1'),
  load('oven', '1'),
  circuit('2', 'two-pole'),
  load('freezer', '2'),
  circuit('3'),
  load('sign', '3'),
])
const single = (of: string, weight: number, expected = 8): CauseSet => ({ of: [of], weight, expected: [expected] })
const none = (weight: number): CauseSet => ({ of: [], weight, expected: [] })
const guilt = (cases: ReturnType<typeof casesOf>): number =>
  cases.reduce((sum, c) => sum + (c.guilty ? c.weight : 0), 0)

describe('cases of an isolation', () => {
  const sets = [single('load:mixer', 0.5), single('circuit:1', 0.2), single('load:sign', 0.1), none(0.2)]

  it('takes the loads of a circuit with it, and leaves the circuit when only a load goes', () => {
    const of = (refs: string[], circuits: string[]) => guilt(casesOf(bakery, { of: refs, circuits }, sets, 8, true))
    expect(of(['circuit:1'], ['1'])).toBeCloseTo(0.7, 12)
    expect(of(['load:mixer'], [])).toBeCloseTo(0.5, 12)
    expect(of(['circuit:1', 'circuit:3'], ['1', '3'])).toBeCloseTo(0.8, 12)
    expect(of(['circuit:2'], ['2'])).toBe(0)
  })

  it('leaves part of a fault with the neutral when only the line opens, and says nothing less by two poles', () => {
    const quiet = (isolation: { of: string[]; circuits: string[] }, poles: boolean) =>
      casesOf(bakery, isolation, [single('load:mixer', 1)], 8, poles).find((c) => c.left === 0)?.weight
    expect(quiet({ of: ['circuit:1'], circuits: ['1'] }, true)).toBe(1)
    expect(quiet({ of: ['circuit:1'], circuits: ['1'] }, false)).toBeCloseTo(0.8, 12)
    expect(quiet({ of: ['load:mixer'], circuits: [] }, false)).toBe(1)
    const freezer = casesOf(bakery, { of: ['circuit:2'], circuits: ['2'] }, [single('load:freezer', 1)], 8, false)
    expect(freezer).toEqual([{ weight: 1, guilty: true, left: 0 }])
  })

  it('goes by the insulation tests of line and neutral where there are both', () => {
    const tested = (between: 'line-earth' | 'neutral-earth', megohms: number) => ({
      id: between,
      kind: 'insulation' as const,
      of: 'circuit:1',
      between,
      testVolts: 500,
      megohms,
      atLeast: false,
      loadsConnected: false,
      surgePartsConnected: false,
      at: START,
    })
    const timeline = timelineOf({
      things: [...bakery.things.values()],
      tests: [tested('line-earth', 9), tested('neutral-earth', 1)],
    })
    const cases = casesOf(
      { ...bakery, timeline },
      { of: ['circuit:1'], circuits: ['1'] },
      [single('circuit:1', 1)],
      8,
      false,
    )
    // conductances 1/9 and 1: the line carries a tenth of the fault
    expect(cases.find((c) => c.left === 0)!.weight).toBeCloseTo(0.1, 12)
  })

  it('never touches the device or the supply, and shares what has no place out over the circuits', () => {
    const one = { of: ['circuit:1'], circuits: ['1'] }
    expect(guilt(casesOf(bakery, one, [single('device', 0.5), single('supply', 0.5)], 8, true))).toBe(0)
    expect(guilt(casesOf(bakery, one, [single('rain', 1)], 8, true))).toBeCloseTo(1 / 3, 12)
    const carried = { ...bakery, carriers: new Map([['rain', '1']]) }
    expect(guilt(casesOf(carried, one, [single('rain', 1)], 8, true))).toBeCloseTo(0.9, 12)
  })

  it('keeps the trips of other causes going', () => {
    const both: CauseSet = { of: ['load:mixer', 'load:sign'], weight: 1, expected: [5, 3] }
    expect(casesOf(bakery, { of: ['load:mixer'], circuits: [] }, [both], 8, true)).toEqual([
      { weight: 1, guilty: true, left: 0.375 },
    ])
  })
})

describe('best isolations', () => {
  const belief = gammaPoisson(8, 168)

  it('asks first about what is most in doubt, and never twice the same', () => {
    const found = bestIsolations(bakery, [single('load:mixer', 0.5), single('load:sign', 0.1), none(0.4)], 8, belief, 3)
    expect(found[0]!.isolation.of).toEqual(['load:mixer'])
    // the whole circuit of the mixer asks the same as the mixer
    expect(found.map((p) => p.isolation.of.join())).not.toContain('circuit:1')
    for (const p of found) expect(p.trial.settles).toBeGreaterThanOrEqual(0.9)
  })

  it('halves the board when every circuit may be it', () => {
    const refs = ['1', '2', '3', '4', '5', '6']
    const board = siteOf(refs.map((ref) => circuit(ref)))
    const [best] = bestIsolations(
      board,
      [...refs.map((ref) => single(`circuit:${ref}`, 0.15)), none(0.1)],
      8,
      belief,
      3,
    )
    expect(best!.isolation.circuits.length).toBeGreaterThanOrEqual(2)
    expect(best!.byBreaker!.settles).toBeLessThan(best!.trial.settles)
  })

  it('leaves alone what only a suspect without a place could bring', () => {
    expect(bestIsolations(bakery, [single('rain', 0.9), none(0.1)], 8, belief, 3)).toEqual([])
    const carried = { ...bakery, carriers: new Map([['rain', '3']]) }
    const found = bestIsolations(carried, [single('rain', 0.7), none(0.3)], 8, belief, 3)
    expect(found[0]!.isolation.of).toEqual(['circuit:3'])
  })

  it('needs fewer days the oftener trips come', () => {
    const sets = (n: number) => [single('load:mixer', 0.5, n), none(0.5)]
    const days = [4, 8, 16, 32].map((n) => bestIsolations(bakery, sets(n), n, gammaPoisson(n, 168), 1)[0]!.days)
    expect(days).toEqual([...days].sort((a, b) => b - a))
    expect(days[0]!).toBeGreaterThan(days[3]!)
  })

  it('does not depend on the order of the sets', () => {
    fc.assert(
      fc.property(fc.array(fc.double({ min: 0.05, max: 1, noNaN: true }), { minLength: 5, maxLength: 5 }), (raw) => {
        const sum = raw.reduce((a, b) => a + b, 0)
        const names = ['load:mixer', 'load:oven', 'load:freezer', 'load:sign']
        const sets = [...names.map((of, i) => single(of, raw[i]! / sum)), none(raw[4]! / sum)]
        const one = bestIsolations(bakery, sets, 8, belief, 3)
        const other = bestIsolations(bakery, [...sets].reverse(), 8, belief, 3)
        expect(other.map((p) => p.trial.settles)).toEqual(one.map((p) => expect.closeTo(p.trial.settles, 9)))
      }),
      { numRuns: 20 },
    )
  })

  it('tries sets of two to four circuits, never the whole board', () => {
    const tried = isolations(bakery, [])
    expect(tried.filter((i) => i.circuits.length === 2)).toHaveLength(3)
    expect(tried.some((i) => i.circuits.length === 3)).toBe(false)
  })
})
