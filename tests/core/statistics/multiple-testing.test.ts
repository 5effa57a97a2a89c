import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { benjaminiHochberg } from '../../../core/statistics/benjamini-hochberg.ts'
import { holm } from '../../../core/statistics/holm.ts'
import { matchReference } from './reference.ts'

/** Ours take no missing p-values: leave them out and put the gaps back, as the file's convention says. */
function withGaps(p: readonly (number | null)[], adjust: (p: number[]) => number[]): (number | null)[] {
  const adjusted = adjust(p.filter((x) => x !== null))
  let next = 0
  return p.map((x) => (x === null ? null : adjusted[next++]!))
}

describe('holm and benjaminiHochberg', () => {
  matchReference('multiple-testing.json', ({ p, alpha }) => {
    const h = withGaps(p, holm)
    const b = withGaps(p, benjaminiHochberg)
    const rejected = (list: (number | null)[]): number => list.filter((x) => x !== null && x <= alpha).length
    return { holm: h, benjamini_hochberg: b, rejected_holm: rejected(h), rejected_benjamini_hochberg: rejected(b) }
  })

  it('never lower a p-value, and Holm is never below Benjamini–Hochberg', () => {
    fc.assert(
      fc.property(fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { maxLength: 30 }), (p) => {
        const h = holm(p)
        const b = benjaminiHochberg(p)
        p.forEach((x, i) => {
          expect(b[i]).toBeGreaterThanOrEqual(x)
          expect(h[i]! - b[i]!).toBeGreaterThanOrEqual(-1e-15)
        })
      }),
    )
  })

  it.each([-0.1, 1.1, Number.NaN])('refuse %s', (p) => {
    expect(() => holm([0.5, p])).toThrow(expect.objectContaining({ code: 'out_of_range' }))
    expect(() => benjaminiHochberg([0.5, p])).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})
