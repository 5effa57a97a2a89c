import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { poissonRate, poissonRateTest } from '../../../core/statistics/poisson-rate.ts'
import { matchReference } from './reference.ts'

describe('poissonRate', () => {
  matchReference('poisson-one-rate.json', ({ events, exposure, confidence, rate0 }) => {
    const { rate, low, high } = poissonRate(events, exposure, { confidence })
    const oneSided = poissonRate(events, exposure, { confidence: 2 * confidence - 1 })
    const limits = { rate, lower: low, upper: high, one_sided_lower: oneSided.low, one_sided_upper: oneSided.high }
    if (rate0 === undefined) return limits
    const p = poissonRateTest(events, exposure, rate0)
    return {
      ...limits,
      p_less: p.pLess,
      p_greater: p.pGreater,
      p_two_sided: p.pTwoSided,
      p_two_sided_doubled: p.pTwoSidedDoubled,
    }
  })

  it('scales with the unit of exposure', () => {
    fc.assert(
      fc.property(fc.nat(500), fc.double({ min: 0.01, max: 1e5, noNaN: true }), (events, exposure) => {
        const hours = poissonRate(events, exposure)
        const days = poissonRate(events, exposure / 24)
        expect(days.low).toBeCloseTo(hours.low * 24, 9 - Math.ceil(Math.log10(1 + hours.high * 24)))
        expect(days.high / (hours.high * 24)).toBeCloseTo(1, 10)
      }),
    )
  })

  it('agrees with its own test: the limits are where the one-sided p-values are a half of 5 %', () => {
    const { low, high } = poissonRate(7, 20)
    expect(poissonRateTest(7, 20, low).pGreater).toBeCloseTo(0.025, 12)
    expect(poissonRateTest(7, 20, high).pLess).toBeCloseTo(0.025, 12)
  })

  it.each([
    [1.5, 10, 0.95],
    [-1, 10, 0.95],
    [1, 0, 0.95],
    [1, Number.NaN, 0.95],
    [1, 10, 1],
  ])('refuses %s events in %s at %s', (events, exposure, confidence) => {
    expect(() => poissonRate(events, exposure, { confidence })).toThrow(
      expect.objectContaining({ code: 'out_of_range' }),
    )
  })
})
