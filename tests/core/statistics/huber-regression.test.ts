import { describe, expect, it } from 'vitest'
import { huberRegression } from '../../../core/statistics/huber-regression.ts'
import { matchReference } from './reference.ts'

describe('huberRegression', () => {
  matchReference('huber-regression.json', ({ x, y, k, fixed_scale }) => {
    const fit = huberRegression(x, y, { k, ...(fixed_scale === undefined ? {} : { scale: fixed_scale }) })
    return {
      coefficients: fit.coefficients,
      scale: fit.scale,
      weights: fit.weights,
      standard_errors: fit.standardErrors,
    }
  })

  it('has the sandwich error of least squares when k is large', () => {
    // White (1980), Econometrica 48, 817-838, for a mean: √Σ r² / n, here r = −3, −1, 0, 4.
    const { sandwichErrors } = huberRegression([[1], [1], [1], [1]], [2, 4, 5, 9], { k: 100 })
    expect(sandwichErrors[0]).toBeCloseTo(Math.sqrt(26) / 4, 12)
  })

  it('does not follow one wild value, and follows shifts and scales', () => {
    const x = Array.from({ length: 30 }, (_, i) => [1, i])
    const y = x.map((r, i) => 1 + 0.5 * r[1]! + ((i * 7) % 5) * 0.1)
    const wild = y.map((v, i) => (i === 28 ? v + 1e4 : v))
    const sound = huberRegression(x, y)
    expect(huberRegression(x, wild).coefficients[1]).toBeCloseTo(sound.coefficients[1]!, 1)
    const moved = huberRegression(
      x,
      y.map((v) => 10 * v + 3),
    )
    expect(moved.coefficients[1]).toBeCloseTo(10 * sound.coefficients[1]!, 6)
    expect(moved.coefficients[0]).toBeCloseTo(10 * sound.coefficients[0]! + 3, 6)
  })

  it.each([
    [
      'singular',
      [
        [1, 2],
        [1, 2],
      ],
      [1, 2],
    ],
    ['too_few_values', [[1, 2]], [1]],
    ['not_finite', [[1], [1]], [1, Number.POSITIVE_INFINITY]],
  ])('throws %s', (code, x, y) => {
    expect(() => huberRegression(x, y)).toThrow(expect.objectContaining({ code }))
  })
})
