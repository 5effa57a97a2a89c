import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { leastSquares } from '../../../core/statistics/least-squares.ts'
import { matchReference } from './reference.ts'

describe('leastSquares', () => {
  matchReference('least-squares.json', ({ x, y, weights }, name) => {
    const fit = leastSquares(x, y, weights)
    const always = {
      coefficients: fit.coefficients,
      residual_sum_of_squares: fit.residualSumOfSquares,
      df_residual: fit.degreesOfFreedom,
      residual_sd: fit.residualSd,
      residuals: fit.residuals,
      covariance: fit.covariance,
    }
    // The file lists a null for each coefficient where ours says null once.
    return name === 'as many rows as coefficients' ? always : { ...always, standard_errors: fit.standardErrors }
  })

  it('follows the units of a column and of y', () => {
    const row = fc.tuple(fc.constant(1), fc.integer({ min: -50, max: 50 }))
    fc.assert(
      fc.property(
        fc.array(row, { minLength: 4, maxLength: 20 }),
        fc.infiniteStream(fc.integer({ min: -9, max: 9 })),
        (x, noise) => {
          fc.pre(new Set(x.map((r) => r[1])).size > 1)
          const y = x.map((r) => 2 + 3 * r[1] + (noise.next().value ?? 0))
          const plain = leastSquares(x, y)
          const scaled = leastSquares(
            x.map((r) => [1, r[1] * 1000]),
            y.map((v) => v / 10),
          )
          expect(scaled.coefficients[1]! * 10_000).toBeCloseTo(plain.coefficients[1]!, 7)
          expect(scaled.standardErrors![1]! * 10_000).toBeCloseTo(plain.standardErrors![1]!, 7)
        },
      ),
    )
  })

  it('counts a row of weight 2 as two rows, and one of weight 0 as none', () => {
    const once = leastSquares(
      [
        [1, 1],
        [1, 2],
        [1, 4],
        [1, 9],
      ],
      [1, 3, 2, 50],
      [1, 2, 1, 0],
    )
    const twice = leastSquares(
      [
        [1, 1],
        [1, 2],
        [1, 2],
        [1, 4],
      ],
      [1, 3, 3, 2],
    )
    expect(once.coefficients[1]).toBeCloseTo(twice.coefficients[1]!, 12)
    expect(once.degreesOfFreedom).toBe(1)
  })

  it.each([
    [
      'singular',
      [
        [1, 2],
        [1, 2],
        [1, 2],
      ],
      [1, 2, 3],
    ],
    ['too_few_values', [[1, 2]], [1]],
    [
      'unequal_lengths',
      [
        [1, 2],
        [1, 3],
      ],
      [1],
    ],
    [
      'not_finite',
      [
        [1, 2],
        [1, Number.NaN],
      ],
      [1, 2],
    ],
  ])('throws %s', (code, x, y) => {
    expect(() => leastSquares(x, y)).toThrow(expect.objectContaining({ code }))
  })
})
