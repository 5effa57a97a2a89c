import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { conductionMa, leastInsulation, parallelInsulation } from '../../../core/trade/insulation.ts'

const value = (megohms: number, atLeast = false): { megohms: number; atLeast: boolean } => ({ megohms, atLeast })

describe('parallelInsulation', () => {
  it('of 2, 3 and 6 MΩ is 1 MΩ', () => {
    // By hand: 1/2 + 1/3 + 1/6 = 1.
    expect(parallelInsulation([value(2), value(3), value(6)]).megohms).toBeCloseTo(1, 12)
  })

  it('is a lower bound as soon as one meter was at full scale', () => {
    const result = parallelInsulation([value(999, true), value(1)])
    expect(result.megohms).toBeCloseTo(0.999, 12) // 999 · 1 / 1000
    expect(result.atLeast).toBe(true)
  })

  it('of a short is a short, whatever lies beside it', () => {
    expect(parallelInsulation([value(0), value(999, true)])).toEqual(value(0))
  })

  it('lies below its least part and does not depend on order', () => {
    const parts = fc.array(
      fc.record({ megohms: fc.double({ min: 0.001, max: 1e4, noNaN: true }), atLeast: fc.boolean() }),
      {
        minLength: 2,
        maxLength: 8,
      },
    )
    fc.assert(
      fc.property(parts, (list) => {
        const { megohms, atLeast } = parallelInsulation(list)
        expect(megohms).toBeLessThan(Math.min(...list.map((p) => p.megohms)))
        const back = parallelInsulation([...list].reverse())
        expect(back.megohms).toBeCloseTo(megohms, 9)
        expect(back.atLeast).toBe(atLeast)
      }),
    )
  })

  it.each([
    ['too_few_values', []],
    ['out_of_range', [value(-1)]],
    ['out_of_range', [value(Number.NaN)]],
  ])('throws %s', (code, parts) => {
    expect(() => parallelInsulation(parts)).toThrow(expect.objectContaining({ code }))
  })
})

describe('conduction', () => {
  it('of 1 MΩ at 230 V is 0.23 mA', () => {
    expect(conductionMa(230, 1)).toBeCloseTo(0.23, 12)
  })
})

describe('leastInsulation', () => {
  // BS 7671 table 64, IEC 60364-6 table 6.1 (from memory).
  it.each([
    [24, true, 0.5, 250],
    [230, false, 1, 500],
    [500, false, 1, 500],
    [690, false, 1, 1000],
  ])('at %i V', (volts, extraLow, megohms, testVolts) => {
    expect(leastInsulation(volts, extraLow)).toEqual({ megohms, testVolts })
  })
})
