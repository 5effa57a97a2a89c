import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { poissonRateRatio } from '../../../core/statistics/poisson-rate-ratio.ts'
import { matchReference } from './reference.ts'

describe('poissonRateRatio', () => {
  matchReference('poisson-two-rates.json', ({ events, exposure, confidence, ratio0 }) => {
    const r = poissonRateRatio(events, exposure, { confidence, ratio0 })
    return {
      rate_ratio: r.ratio,
      lower: r.low,
      upper: r.high,
      p_less: r.pLess,
      p_greater: r.pGreater,
      p_two_sided: r.pTwoSided,
      p_two_sided_doubled: r.pTwoSidedDoubled,
      p_two_sided_mid: r.pTwoSidedMid,
    }
  })

  it('mirrors when the two rates change places', () => {
    const count = fc.integer({ min: 1, max: 200 })
    const hours = fc.double({ min: 0.1, max: 1e4, noNaN: true })
    fc.assert(
      fc.property(count, count, hours, hours, (a, b, s, t) => {
        const one = poissonRateRatio([a, b], [s, t])
        const other = poissonRateRatio([b, a], [t, s])
        expect(one.low * other.high).toBeCloseTo(1, 9)
        expect(one.pGreater).toBeCloseTo(other.pLess, 11)
        expect(one.pTwoSided).toBeCloseTo(other.pTwoSided, 9)
      }),
    )
  })

  it.each([
    [
      [1, -1],
      [1, 1],
    ],
    [
      [1, 1],
      [0, 1],
    ],
    [
      [1, 1],
      [1, Number.POSITIVE_INFINITY],
    ],
  ])('refuses %j in %j', (events, exposures) => {
    expect(() => poissonRateRatio(events as [number, number], exposures as [number, number])).toThrow(
      expect.objectContaining({ code: 'out_of_range' }),
    )
  })
})
