import { describe, expect, it } from 'vitest'
import { stayFor } from '../../../../core/findings/next/stay.ts'
import { gammaPoisson, predictivePmf } from '../../../../core/statistics/gamma-poisson.ts'

describe('stayFor', () => {
  const belief = gammaPoisson(4, 168)

  it('has a closed form for one trip', () => {
    // (H / (H + t))^4.5 = 0.1
    expect(stayFor(belief, 1)).toBeCloseTo(168 * (0.1 ** (-1 / 4.5) - 1), 6)
  })

  it('leaves one chance in ten of fewer than three', () => {
    const hours = stayFor(belief, 3)
    const fewer = [0, 1, 2].reduce((sum, k) => sum + predictivePmf(belief, hours, k), 0)
    expect(fewer).toBeCloseTo(0.1, 5)
    expect(hours).toBeGreaterThan(stayFor(belief, 1))
  })

  it('is endless for what has hardly ever happened', () => {
    expect(stayFor(gammaPoisson(0, 5_000), 3)).toBe(Number.POSITIVE_INFINITY)
  })
})
