import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { likelySets } from '../../../core/findings/likely-sets.ts'
import { lineUp } from '../../../core/findings/line-up.ts'

const window = (hours: number, inside: readonly number[]) => {
  const shares = Float64Array.from(inside)
  return {
    key: 'on',
    words: 'while it ran',
    prior: 1,
    hoursBy: [hours],
    weightsBy: [shares],
    inside: shares,
    insideHours: hours,
  }
}

describe('likelySets', () => {
  it('add up to one, and to the probability of every suspect', () => {
    fc.assert(
      fc.property(
        fc.array(fc.array(fc.constantFrom(0, 1, 0.5), { minLength: 6, maxLength: 6 }), { minLength: 2, maxLength: 5 }),
        (rows) => {
          const candidates = rows.map((inside, i) => ({
            of: `load:${i}`,
            odds: 0.08,
            windows: [window(10 + 5 * i, inside)],
          }))
          const { standings, none, sets } = lineUp(168, 6, candidates)
          expect(sets.reduce((sum, s) => sum + s.weight, 0)).toBeCloseTo(1, 9)
          for (const { of, probability } of standings) {
            const sum = sets.filter((s) => s.of.includes(of)).reduce((total, s) => total + s.weight, 0)
            // sets below one in ten thousand are left out, and the prior part knows single causes only
            expect(Math.abs(sum - probability)).toBeLessThan(0.01)
          }
          expect(Math.abs(sets.filter((s) => s.of.length === 0).reduce((t, s) => t + s.weight, 0) - none)).toBeLessThan(
            0.01,
          )
          for (const { expected } of sets) expect(expected.reduce((a, b) => a + b, 0)).toBeLessThanOrEqual(6 + 1e-9)
        },
      ),
      { numRuns: 25 },
    )
  })

  it('mixes the prior in as the doubt wants it', () => {
    const sets = likelySets(4, [{ of: 'rain', odds: 0.25 }], [{ members: [0], weight: 1, expected: [3] }], {
      doubt: 0.1,
      priorNone: 0.8,
    })
    expect(sets).toEqual([
      { of: ['rain'], weight: expect.closeTo(0.92, 12), expected: [expect.closeTo((0.9 * 3 + 0.02 * 4) / 0.92, 12)] },
      { of: [], weight: expect.closeTo(0.08, 12), expected: [] },
    ])
  })
})
