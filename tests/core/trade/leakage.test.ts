import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { APPLIANCES, applianceLimitMa } from '../../../core/trade/appliances.ts'
import { clampInterval } from '../../../core/trade/clamp.ts'
import {
  capacitiveMa,
  magnitude,
  magnitudeBounds,
  marginalMa,
  phasorSum,
  shareOfTotal,
} from '../../../core/trade/leakage.ts'

const ma = fc.double({ min: 0, max: 100, noNaN: true })
const phasor = fc.record({ conductive: ma, capacitive: ma })

describe('capacitiveMa', () => {
  it('of 4.7 nF at 230 V, 50 Hz is 0.34 mA, of 1 µF 72 mA', () => {
    // By hand: 314.159 · 4.7e-9 · 230 = 3.396e-4 A; 314.159 · 1e-6 · 230 = 72.26e-3 A.
    expect(capacitiveMa(4.7e-9, 230, 50)).toBeCloseTo(0.3396, 4)
    expect(capacitiveMa(1e-6, 230, 50)).toBeCloseTo(72.26, 2)
  })
})

describe('phasor sums', () => {
  it('of 5 mA conductive and 12 mA capacitive read 13 mA, a rise of 1 mA', () => {
    const fault = { conductive: 5, capacitive: 0 }
    const whole = phasorSum([fault, { conductive: 0, capacitive: 12 }])
    expect(magnitude(whole)).toBe(13)
    expect(marginalMa(fault, whole)).toBe(1)
    expect(shareOfTotal(fault, whole)).toBeCloseTo(25 / 169, 12)
  })

  it('stay within the bounds of their magnitudes', () => {
    expect(magnitudeBounds([5, 12])).toEqual({ low: 7, high: 17 })
    fc.assert(
      fc.property(fc.array(phasor, { minLength: 1, maxLength: 6 }), (parts) => {
        const { low, high } = magnitudeBounds(parts.map(magnitude))
        const sum = magnitude(phasorSum(parts))
        expect(sum).toBeGreaterThanOrEqual(low - 1e-9)
        expect(sum).toBeLessThanOrEqual(high + 1e-9)
      }),
    )
  })

  it('are made up of shares that add up to 1', () => {
    fc.assert(
      fc.property(fc.array(phasor, { minLength: 1, maxLength: 6 }), (parts) => {
        const whole = phasorSum(parts)
        fc.pre(magnitude(whole) > 1e-3)
        const shares = parts.map((part) => shareOfTotal(part, whole))
        expect(shares.reduce((a, b) => a + b, 0)).toBeCloseTo(1, 9)
      }),
    )
    expect(shareOfTotal({ conductive: 0, capacitive: 0 }, { conductive: 0, capacitive: 0 })).toBeNaN()
  })
})

describe('clampInterval', () => {
  it('of 12.90 mA at ±(2 % + 5 digits) of 0.01 mA is ±0.308 mA', () => {
    // By hand: 0.02 · 12.9 = 0.258; 5 · 0.01 = 0.05.
    const { low, high } = clampInterval(12.9, { percent: 2, digits: 5 }, 0.01)
    expect(low).toBeCloseTo(12.592, 9)
    expect(high).toBeCloseTo(13.208, 9)
  })

  it('never goes below nothing, and refuses nonsense', () => {
    expect(clampInterval(0.03, { percent: 2, digits: 5 }, 0.01).low).toBe(0)
    expect(() => clampInterval(-1, { percent: 2, digits: 5 }, 0.01)).toThrow(
      expect.objectContaining({ code: 'out_of_range' }),
    )
  })
})

describe('appliances', () => {
  it('limit stationary heating by its power, up to 5 mA', () => {
    // IEC 60335-1 clause 13.2 (from memory): 0.75 mA, or 0.75 mA per kW, at most 5 mA.
    const heating = APPLIANCES.find((a) => a.kind === 'stationary-heating')!
    expect([0.5, 4, 12].map((kw) => applianceLimitMa(heating, kw))).toEqual([0.75, 3, 5])
  })

  it('name a source for every limit and a kind only once', () => {
    expect(APPLIANCES.every((a) => a.source.includes('IEC'))).toBe(true)
    expect(new Set(APPLIANCES.map((a) => a.kind)).size).toBe(APPLIANCES.length)
  })
})
