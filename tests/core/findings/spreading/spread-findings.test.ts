import { describe, expect, it } from 'vitest'
import { type BudgetLine, type Headroom, Spread } from '../../../../core/contract/findings.ts'
import { circuitDemand } from '../../../../core/findings/spreading/circuit-demand.ts'
import { spreadFindings } from '../../../../core/findings/spreading/spread-findings.ts'
import type { Thing } from '../../../../core/timeline/timeline.ts'
import { HOUR, loadOn, START, timelineOf } from '../timeline-of.ts'

const END = START + 168 * HOUR
const circuit = (ref: string): Thing => ({
  ...loadOn(ref, [[START, END]], START, END),
  of: `circuit:${ref}`,
  kind: 'circuit',
  circuit: ref,
})
const line = (of: string, ma: number, half = 0): BudgetLine => ({
  of,
  ma,
  low: ma - half,
  high: ma + half,
  basis: 'switching',
  switchings: 5,
})
const none = (of: string): BudgetLine => ({ of, ma: null, low: null, high: null, basis: 'unjudged', switchings: 0 })
const standing = (p50: number | null): Headroom => ({
  tripMa: { value: 23, low: 22, high: 24, basis: 'ramp-tests' },
  standingMa: p50 === null ? null : { p5: p50, p50, p95: p50, max: p50 },
  shareOfRating: p50 === null ? null : p50 / 30,
  advisedShare: 0.3,
})
const refs = ['1', '2', '3', '4', '5']
const board = (given: object = {}) => {
  const timeline = timelineOf({ things: refs.map(circuit), ...given })
  return {
    ...timeline,
    rcd: { ...timeline.rcd, circuits: refs.map((ref) => ({ ref, isolation: 'single-pole' as const, loads: [] })) },
  }
}

describe('spreadFindings', () => {
  const lines = [4, 5, 6, 7, 8].map((ma, i) => line(`circuit:${i + 1}`, ma / 2))

  it('shows two and three devices, each circuit alone, and the share before and after', () => {
    const found = spreadFindings(board(), lines, standing(15))
    expect(Spread.parse(found)).toEqual(found)
    expect(found.plans.map((p) => p.devices.length)).toEqual([2, 3])
    // Korf (1998), Artificial Intelligence 106, 181-203 (from memory): 4, 5, 6, 7, 8 part into 15 and 15.
    expect(found.plans[0]!.devices.map((d) => d.ma)).toEqual([7.5, 7.5])
    expect(found.plans[0]!.devices.map((d) => d.share)).toEqual([0.25, 0.25])
    expect(found.nowShare).toBe(0.5)
    expect(found.alone[0]).toEqual({ of: 'circuit:5', ma: 4, share: 0.133333, restMa: 11, restShare: 0.366667 })
    expect(found.text).toMatch(/^15\.0 mA of standing leakage are 0\.50 of the rating.*would stand at 0\.25\./)
  })

  it('says what comes on top when the circuits do not account for all', () => {
    const found = spreadFindings(board(), lines, standing(18))
    expect(found.unplacedMa).toBe(3)
    expect(found.text).toMatch(/at 0\.35 if the 3\.0 mA that no circuit accounts for came on top/)
  })

  it('plans nothing when most of the leakage has no place', () => {
    expect(spreadFindings(board(), lines, standing(40)).text).toMatch(
      /Only 15\.0 mA of it can be placed.*no more than a beginning/,
    )
  })

  it('asks for a survey when it has too few figures', () => {
    const found = spreadFindings(
      board(),
      [line('circuit:1', 2), ...refs.slice(1).map((r) => none(`circuit:${r}`))],
      standing(9),
    )
    expect(found).toMatchObject({ plans: [], unjudged: ['circuit:2', 'circuit:3', 'circuit:4', 'circuit:5'] })
    expect(found.text).toMatch(/^Only one circuit has a figure yet.*survey/)
    expect(spreadFindings(timelineOf({}), [], standing(null)).text).toMatch(/only one circuit on this device/)
  })

  it('says what figures of single-pole breakers leave out', () => {
    const open = lines.map((l) => ({ ...l, neutralStays: true }))
    expect(spreadFindings(board(), open, standing(15)).text).toMatch(/leave out what leaks from their neutral/)
  })

  it('does not say that a low level asks for it', () => {
    expect(
      spreadFindings(
        board(),
        lines.map((l) => ({ ...l, ma: 1, high: 1 })),
        standing(5),
      ).text,
    ).toMatch(/does not ask/)
  })
})

describe('circuitDemand', () => {
  it('goes by the loads, while they run, where the circuit has no figure of its own', () => {
    const mixer = loadOn('mixer', [[START, START + 42 * HOUR]], START, END)
    const timeline = timelineOf({ things: [circuit('1'), mixer] })
    const [found] = circuitDemand(timeline, [none('circuit:1'), line('load:mixer', 4, 1)])
    // a quarter of the week
    expect(found).toMatchObject({ of: 'circuit:1', ma: 1, high: 1.25 })
    // what stays of the circuit without its loads, and a quarter of the mixer
    const still = { ...line('circuit:1', 3, 0.2), baseMa: 2 }
    const [whole] = circuitDemand(timeline, [still, line('load:mixer', 4, 1)])
    expect(whole!.ma).toBeCloseTo(3, 9)
    expect(whole!.high).toBeCloseTo(2 + 0.2 + 1.25, 9)
    expect(circuitDemand(timeline, [line('circuit:1', 3), line('load:mixer', 4)])[0]).toMatchObject({ ma: 3 })
  })
})
