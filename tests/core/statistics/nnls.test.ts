import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { nnls } from '../../../core/statistics/nnls.ts'
import { matchReference } from './reference.ts'

describe('nnls', () => {
  matchReference('nnls.json', ({ a, b }) => {
    const fit = nnls(a, b)
    const positive = [...fit.coefficients.keys()].filter((j) => fit.coefficients[j]! > 0)
    return {
      x: fit.coefficients,
      residual_norm: Math.sqrt(fit.residualSumOfSquares),
      residual_sum_of_squares: fit.residualSumOfSquares,
      positive,
      gradient_where_zero: [...fit.gradient].filter((_, j) => fit.coefficients[j] === 0),
    }
  })

  it('meets the Kuhn–Tucker conditions', () => {
    const value = fc.integer({ min: -20, max: 20 })
    const row = fc.tuple(value, value, value, value)
    fc.assert(
      fc.property(
        fc.array(row, { minLength: 6, maxLength: 10 }),
        fc.array(value, { minLength: 10, maxLength: 10 }),
        (a, spare) => {
          const b = spare.slice(0, a.length)
          // A unit block makes the columns independent.
          const rows = [...a, [1, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]
          const fit = nnls(rows, [...b, 1, 1, 1, 1])
          fit.coefficients.forEach((x, j) => {
            expect(x).toBeGreaterThanOrEqual(0)
            expect(fit.gradient[j]!).toBeLessThan(1e-8)
            expect(Math.abs(x * fit.gradient[j]!)).toBeLessThan(1e-7)
          })
        },
      ),
    )
  })

  it('throws unequal_lengths', () => {
    expect(() => nnls([[1], [2]], [1])).toThrow(expect.objectContaining({ code: 'unequal_lengths' }))
  })
})
