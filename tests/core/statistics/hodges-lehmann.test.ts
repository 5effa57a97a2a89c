import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { hodgesLehmann, hodgesLehmannShift } from '../../../core/statistics/hodges-lehmann.ts'
import { matchReference } from './reference.ts'

describe('hodgesLehmann', () => {
  // The file gives null for no value; ours throws (see below).
  matchReference(
    'hodges-lehmann.json',
    ({ x, y }) => ({ estimate: y === undefined ? hodgesLehmann(x) : hodgesLehmannShift(x, y) }),
    { except: ['no value'] },
  )

  it('follows shift and scale and ignores order', () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: -99, max: 99 }), { minLength: 1, maxLength: 20 }), (x) => {
        expect(hodgesLehmann(x.map((v) => 4 - 2 * v))).toBeCloseTo(4 - 2 * hodgesLehmann(x), 10)
        expect(hodgesLehmann([...x].reverse())).toBe(hodgesLehmann(x))
        expect(hodgesLehmannShift(x, x)).toBe(0)
      }),
    )
  })

  it('throws for no value', () => {
    expect(() => hodgesLehmann([])).toThrow(expect.objectContaining({ code: 'too_few_values' }))
    expect(() => hodgesLehmannShift([1], [])).toThrow(expect.objectContaining({ code: 'too_few_values' }))
  })
})
