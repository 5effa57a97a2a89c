import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { binomialUpperTail } from '../../../core/statistics/binomial.ts'
import { poissonBinomialUpperTail } from '../../../core/statistics/poisson-binomial.ts'

/** Sum over all 2^n outcomes. */
function byOutcomes(k: number, chances: readonly number[]): number {
  let tail = 0
  for (let code = 0; code < 1 << chances.length; code++) {
    let chance = 1
    let count = 0
    chances.forEach((p, i) => {
      const hit = ((code >> i) & 1) === 1
      chance *= hit ? p : 1 - p
      count += hit ? 1 : 0
    })
    if (count >= k) tail += chance
  }
  return tail
}

describe('poissonBinomialUpperTail', () => {
  it('is the sum over all outcomes, whatever the order', () => {
    fc.assert(
      fc.property(fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { maxLength: 9 }), fc.nat(10), (p, k) => {
        const tail = poissonBinomialUpperTail(k, p)
        expect(tail).toBeCloseTo(byOutcomes(k, p), 12)
        expect(poissonBinomialUpperTail(k, [...p].reverse())).toBeCloseTo(tail, 12)
      }),
      { numRuns: 60 },
    )
  })

  it('is binomial when all chances are equal', () => {
    // The binomial itself is checked against R in its own tests.
    for (const k of [0, 1, 17, 60, 61])
      expect(poissonBinomialUpperTail(k, new Array<number>(60).fill(0.3))).toBeCloseTo(
        binomialUpperTail(k, 60, 0.3, 0.7),
        12,
      )
  })

  it('refuses what is no chance', () => {
    expect(() => poissonBinomialUpperTail(1, [1.2])).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})
