import { describe, expect, it } from 'vitest'
import type { Headroom } from '../../../core/contract/findings.ts'
import type { SiteTest } from '../../../core/contract/records.ts'
import { insulation } from '../../../core/findings/insulation.ts'
import type { Kept } from '../../../core/timeline/evidence.ts'
import type { Thing } from '../../../core/timeline/timeline.ts'
import { loadOn, START, timelineOf } from './timeline-of.ts'

const circuit = (ref: string): Thing => ({
  ...loadOn(ref, [], START, START + 1),
  of: `circuit:${ref}`,
  kind: 'circuit',
  circuit: ref,
  label: `circuit ${ref}`,
})
const load = (ref: string, on: string): Thing => ({ ...loadOn(ref, [], START, START + 1), circuit: on })
let ids = 0
const tested = (
  of: string,
  megohms: number,
  more: Partial<Extract<SiteTest, { kind: 'insulation' }>> = {},
): Kept<SiteTest> => ({
  id: String(ids++),
  kind: 'insulation',
  of,
  between: 'live-earth',
  testVolts: 500,
  megohms,
  atLeast: false,
  loadsConnected: false,
  surgePartsConnected: false,
  at: START,
  ...more,
})
const headroom = (p50: number): Headroom => ({
  tripMa: { value: 24, low: 20, high: 30, basis: 'limits' },
  standingMa: { p5: p50, p50, p95: p50, max: p50 },
  shareOfRating: p50 / 30,
  advisedShare: 0.3,
})
const things = [circuit('1'), load('oven', '1'), circuit('2'), circuit('3')]
const findingsOf = (tests: Kept<SiteTest>[], p50 = 10) => insulation(timelineOf({ things, tests }), headroom(p50))

describe('insulation', () => {
  it('turns resistances into currents and their resultant', () => {
    // domain.md, Formulas: 230 V across 1 MΩ is 0.23 mA; two of 2 MΩ in parallel are 1 MΩ
    const found = findingsOf([tested('circuit:1', 2), tested('circuit:2', 2)])!
    expect(found.resultantMegohms).toBeCloseTo(1, 10)
    expect(found.ma).toBeCloseTo(0.23, 10)
    expect(found.lines.map(({ ma }) => ma)).toEqual([0.115, 0.115])
    expect(found.lines[0]!.withoutMegohms).toBeCloseTo(2, 10)
    expect(found.untested).toEqual(['circuit:3'])
  })

  it('says that most of the standing leakage is not what such a test shows', () => {
    // "a resultant IR of 1 MΩ explains a quarter of a milliamp, not ten"
    const found = findingsOf([tested('circuit:1', 1)])!
    expect(found.explainedShare).toBeCloseTo(0.023, 6)
    expect(found.capacitiveMa).toBeCloseTo(Math.sqrt(100 - 0.23 ** 2), 4)
    expect(found.text).toMatch(/no insulation test shows them/)
  })

  it('takes a reading at full scale as a bound', () => {
    const found = findingsOf([tested('circuit:1', 999, { atLeast: true }), tested('circuit:2', 1.5)])!
    expect(found.atLeast).toBe(true)
    expect(found.lines[0]!.flag).toBe('sound')
    expect(found.lines[0]!.text).toMatch(/at least 999 MΩ, at most/)
    expect(found.lines[1]!.flag).toBe('investigate')
  })

  it('flags surge-protective parts and accuses nobody of them', () => {
    const found = findingsOf([tested('circuit:1', 0.02, { surgePartsConnected: true }), tested('circuit:2', 5)])!
    expect(found.lines[0]!.flag).toBe('surge-parts')
    expect(found.resultantMegohms).toBe(5)
    expect(found.untested).toContain('circuit:1')
    expect(findingsOf([tested('circuit:1', 0.02, { surgePartsConnected: true })])!.ma).toBeNull()
  })

  it('names the limit with its source', () => {
    // 1 MΩ up to 500 V: BS 7671 table 64 (from memory)
    const found = findingsOf([tested('circuit:1', 0.8)])!
    expect(found.lines[0]!.flag).toBe('below-limit')
    expect(found.lines[0]!.text).toMatch(/BS 7671 table 64/)
  })

  it('counts a load once: apart, or with its circuit when that was tested with its loads', () => {
    const apart = findingsOf([tested('circuit:1', 4), tested('load:oven', 4)])!
    expect(apart.resultantMegohms).toBeCloseTo(2, 10)
    const together = findingsOf([tested('circuit:1', 2, { loadsConnected: true }), tested('load:oven', 4)])!
    expect(together.resultantMegohms).toBeCloseTo(2, 10)
  })

  it('takes the latest test of each, line and neutral in parallel, and none between line and neutral', () => {
    const later = findingsOf([tested('circuit:1', 1), tested('circuit:1', 8, { at: START + 1 })])!
    expect(later.resultantMegohms).toBe(8)
    const halves = findingsOf([
      tested('circuit:1', 4, { between: 'line-earth' }),
      tested('circuit:1', 4, { between: 'neutral-earth' }),
    ])!
    expect(halves.resultantMegohms).toBeCloseTo(2, 10)
    expect(findingsOf([tested('circuit:1', 4, { between: 'line-neutral' })])).toBeNull()
  })

  it('is nothing without a test, and a dead short has no finite current', () => {
    expect(findingsOf([])).toBeNull()
    const short = findingsOf([tested('circuit:1', 0)])!
    expect(short.ma).toBeNull()
    expect(short.lines[0]!.ma).toBeNull()
  })
})
