import { readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { chiSquaredCdf, chiSquaredUpperTail } from '../../../core/statistics/chi-squared.ts'
import { gammaQuantile } from '../../../core/statistics/gamma-quantile.ts'
import { gammaRegularised } from '../../../core/statistics/gamma-regularised.ts'
import { logChoose } from '../../../core/statistics/log-choose.ts'
import { logGamma } from '../../../core/statistics/log-gamma.ts'
import { poissonCdf, poissonUpperTail } from '../../../core/statistics/poisson-cdf.ts'
import { logPoissonPmf, poissonPmf } from '../../../core/statistics/poisson-pmf.ts'

// Computed in 60 digits with mpmath; see fixtures/reference/README.md.
const table = JSON.parse(
  readFileSync(new URL('../../../fixtures/reference/gamma-family.json', import.meta.url), 'utf8'),
)
const relative = (got: number, want: number): number => Math.abs(got - want) / Math.abs(want)

describe('logGamma', () => {
  it('agrees with mpmath', () => {
    for (const [x, want] of table.logGamma as [number, number][]) {
      expect(Math.abs(logGamma(x) - want), `x ${x}`).toBeLessThan(8e-15 * Math.max(1, Math.abs(want)))
    }
  })

  it.each([0, -1.5, Number.NaN])('refuses %s', (x) => {
    expect(() => logGamma(x)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})

describe('gammaRegularised', () => {
  it('agrees with mpmath to 1e-12 of the smaller tail, or the last digits of 1', () => {
    // For shapes near 0 the upper tail is the difference from 1 until the continued fraction takes over.
    for (const [shape, x, lower, upper] of table.regularised as [number, number, number, number][]) {
      const got = gammaRegularised(shape, x)
      const where = `shape ${shape}, x ${x}`
      if (lower < 0.5) expect(Math.abs(got.lower - lower), where).toBeLessThan(1e-12 * lower)
      else expect(Math.abs(got.upper - upper), where).toBeLessThan(1e-12 * upper + 2e-15)
      expect(got.lower + got.upper, where).toBeCloseTo(1, 14)
    }
  })

  it('rises with x and falls with the shape', () => {
    const positive = fc.double({ min: 0.01, max: 3000, noNaN: true })
    fc.assert(
      fc.property(positive, positive, positive, (shape, x, more) => {
        const at = gammaRegularised(shape, x).lower
        expect(gammaRegularised(shape, x + more).lower).toBeGreaterThanOrEqual(at - 1e-13)
        expect(gammaRegularised(shape + more, x).lower).toBeLessThanOrEqual(at + 1e-13)
      }),
    )
  })
})

describe('gammaQuantile', () => {
  it('agrees with mpmath', () => {
    for (const [shape, p, want] of table.quantile as [number, number, number][]) {
      expect(relative(gammaQuantile(p, shape), want), `shape ${shape}, p ${p}`).toBeLessThan(2e-12)
    }
  })

  it('undoes the distribution function in both tails', () => {
    const p = fc.double({ min: 1e-12, max: 0.5, noNaN: true })
    const shape = fc.double({ min: 0.05, max: 1e5, noNaN: true })
    fc.assert(
      fc.property(p, shape, (q, a) => {
        expect(relative(gammaRegularised(a, gammaQuantile(q, a)).lower, q)).toBeLessThan(1e-9)
        expect(relative(gammaRegularised(a, gammaQuantile(q, a, 1, 'upper')).upper, q)).toBeLessThan(1e-9)
      }),
    )
  })

  it('knows the ends and the scale', () => {
    expect(gammaQuantile(0, 2)).toBe(0)
    expect(gammaQuantile(1, 2)).toBe(Number.POSITIVE_INFINITY)
    expect(gammaQuantile(0.3, 2, 10)).toBeCloseTo(gammaQuantile(0.3, 2) / 10, 14)
    expect(() => gammaQuantile(1.1, 2)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
    expect(() => gammaQuantile(0.5, 0)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})

describe('poisson and chi-squared', () => {
  it('sums its probabilities to the distribution function', () => {
    for (const mean of [0.2, 3, 40, 1100]) {
      let sum = 0
      for (let k = 0; k <= mean; k++) sum += poissonPmf(k, mean)
      expect(poissonCdf(mean, mean)).toBeCloseTo(sum, 12)
      expect(poissonUpperTail(Math.floor(mean) + 1, mean)).toBeCloseTo(1 - sum, 12)
    }
    expect(logPoissonPmf(0, 0)).toBe(0)
    expect(poissonPmf(3, 0)).toBe(0)
  })

  it('has the 5 % points of the printed tables', () => {
    // Abramowitz & Stegun (1964), table 26.8: chi-squared with 1, 10 and 100 degrees of freedom, Q = 0.05.
    for (const [x, df] of [
      [3.84146, 1],
      [18.307, 10],
      [124.342, 100],
    ] as const) {
      expect(chiSquaredUpperTail(x, df)).toBeCloseTo(0.05, 5)
      expect(chiSquaredCdf(x, df)).toBeCloseTo(0.95, 5)
    }
  })
})

describe('logChoose', () => {
  it('obeys Pascal’s rule and knows small values', () => {
    expect(Math.exp(logChoose(8, 4))).toBeCloseTo(70, 12)
    expect(logChoose(5, 0)).toBe(0)
    fc.assert(
      fc.property(fc.integer({ min: 2, max: 3000 }), fc.nat(), (n, r) => {
        const k = 1 + (r % (n - 1))
        const sum =
          Math.exp(logChoose(n - 1, k - 1) - logChoose(n, k)) + Math.exp(logChoose(n - 1, k) - logChoose(n, k))
        expect(sum).toBeCloseTo(1, 9)
      }),
    )
    expect(() => logChoose(3, 4)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})
