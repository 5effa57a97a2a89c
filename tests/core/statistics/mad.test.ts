import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { mad } from '../../../core/statistics/mad.ts'
import { median } from '../../../core/statistics/median.ts'
import { matchReference } from './reference.ts'

describe('mad and median', () => {
  // The file gives null for no value; ours throw (see below).
  matchReference(
    'mad.json',
    ({ x }) => ({ median: median(x), mad_raw: mad(x, 1), mad: mad(x, 1.4826), mad_exact_constant: mad(x) }),
    { except: ['no value'] },
  )

  it('follow a shift and a change of scale', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: -1000, max: 1000 }), { minLength: 1 }),
        fc.integer({ min: -9, max: 9 }),
        (x, k) => {
          expect(mad(x.map((v) => k * v + 7))).toBeCloseTo(Math.abs(k) * mad(x), 8)
          expect(median(x.map((v) => k * v + 7))).toBeCloseTo(k * median(x) + 7, 8)
        },
      ),
    )
  })

  it('throw for no value and for gaps', () => {
    for (const method of [mad, median]) {
      expect(() => method([])).toThrow(expect.objectContaining({ code: 'too_few_values' }))
      expect(() => method([1, Number.NaN])).toThrow(expect.objectContaining({ code: 'not_finite' }))
    }
  })
})
