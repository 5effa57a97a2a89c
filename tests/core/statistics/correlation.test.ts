import { describe, expect, it } from 'vitest'
import { circularShiftTest, laggedCorrelation } from '../../../core/statistics/correlation.ts'
import { matchReference, referenceCases } from './reference.ts'

describe('laggedCorrelation', () => {
  matchReference('lagged-correlation.json', ({ x, y, max_lag }) => {
    const lags = Array.from({ length: 2 * max_lag + 1 }, (_, i) => i - max_lag)
    return {
      lags,
      pearson: lags.map((lag) => laggedCorrelation(x, y, lag)),
      spearman: lags.map((lag) => laggedCorrelation(x, y, lag, 'spearman')),
    }
  })

  it('changes the sign of the lag when the series change places', () => {
    const x = [1, 4, 2, 8, 5, 7]
    const y = [2, 1, 3, 3, 9, 4]
    expect(laggedCorrelation(x, y, 2)).toBeCloseTo(laggedCorrelation(y, x, -2)!, 14)
  })

  it('throws for unequal lengths', () => {
    expect(() => laggedCorrelation([1, 2], [1], 0)).toThrow(expect.objectContaining({ code: 'unequal_lengths' }))
  })
})

describe('circularShiftTest', () => {
  const shifted = referenceCases('lagged-correlation.json').filter((c) => c.expected.shift_pearson !== null)
  it.each(shifted)('agrees with lagged-correlation.json: $name', ({ input, expected }) => {
    for (const kind of ['pearson', 'spearman'] as const) {
      const want = expected[`shift_${kind}`] as Record<string, number>
      const at0 = circularShiftTest(input.x, input.y, { kind })
      expect(at0.observed).toBeCloseTo(want.observed!, 10)
      expect(at0.pGreater).toBeCloseTo(want.p_greater!, 10)
      expect(at0.pTwoSided).toBeCloseTo(want.p_two_sided!, 10)
      const over = circularShiftTest(input.x, input.y, { kind, maxLag: input.max_lag })
      expect(over.observed).toBeCloseTo(want.max_abs_over_lags!, 10)
      expect(over.pGreater).toBeCloseTo(want.p_max_abs_over_lags!, 10)
    }
  })

  it('throws zero_spread for a series that does not vary', () => {
    expect(() => circularShiftTest([1, 2, 3], [2, 2, 2])).toThrow(expect.objectContaining({ code: 'zero_spread' }))
  })
})
