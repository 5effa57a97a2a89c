import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { BudgetLine, Headroom } from '../../core/contract/findings.ts'
import { budgetOf, remaining } from '../../web/headroom/parts.ts'

const HEADROOM: Headroom = Object.freeze({
  tripMa: { value: 23.5, low: 22, high: 24, basis: 'ramp-tests' as const },
  standingMa: { p5: 9, p50: 12, p95: 18, max: 22 },
  shareOfRating: 0.4,
  advisedShare: 0.3,
})
const line = (of: string, ma: number | null): BudgetLine => ({
  of,
  ma,
  low: ma,
  high: ma,
  basis: ma === null ? 'unjudged' : 'switching',
  switchings: 4,
})
const LINES = Object.freeze([line('circuit:7', 2), line('load:freezer', 5), line('load:mixer', null)])

describe('budgetOf', () => {
  it('takes what is usually on out of the median to get the rest', () => {
    const budget = budgetOf(HEADROOM, LINES, (of) => (of === 'load:freezer' ? 0.1 : null))
    expect(budget?.parts.map((part) => [part.of, part.usuallyOn])).toEqual([
      ['load:freezer', false],
      ['circuit:7', true],
    ])
    expect(budget?.rest).toBe(10)
    expect(budget?.unjudged.map((one) => one.of)).toEqual(['load:mixer'])
  })

  it('has nothing to split without readings', () => {
    expect(budgetOf({ ...HEADROOM, standingMa: null }, LINES, () => null)).toBeNull()
  })
})

describe('remaining', () => {
  it('leaves the plain difference, with its share and headroom', () => {
    const budget = budgetOf(HEADROOM, LINES, () => null)!
    expect(remaining(budget, new Set())).toMatchObject({ ma: 17, headroom: 6.5 })
    expect(remaining(budget, new Set(['load:freezer']))).toMatchObject({ ma: 12, least: 12, most: 22 })
  })

  // Law: the length of a sum of arrows lies between the bounds for every choice of their directions.
  it('bounds every sum of phasors', () => {
    const part = fc.tuple(fc.double({ min: 0.01, max: 20, noNaN: true }), fc.double({ min: 0, max: 6.3, noNaN: true }))
    fc.assert(
      fc.property(fc.array(part, { minLength: 1, maxLength: 5 }), fc.integer({ min: 1, max: 5 }), (parts, taken) => {
        const lines = parts.map(([ma], i) => line(`load:${i}`, ma))
        const budget = budgetOf({ ...HEADROOM, standingMa: { ...HEADROOM.standingMa!, p50: 3 } }, lines, () => 0)!
        const out = new Set(lines.slice(0, taken).map((one) => one.of))
        const whole = remaining(budget, new Set()).ma
        let [x, y] = [whole, 0]
        parts.forEach(([ma, angle], i) => {
          if (!out.has(`load:${i}`)) return
          x -= ma * Math.cos(angle)
          y -= ma * Math.sin(angle)
        })
        const { least, most } = remaining(budget, out)
        // Rounding of sums of a handful of numbers below 100.
        expect(Math.hypot(x, y)).toBeGreaterThanOrEqual(least - 1e-9)
        expect(Math.hypot(x, y)).toBeLessThanOrEqual(most + 1e-9)
      }),
    )
  })
})
