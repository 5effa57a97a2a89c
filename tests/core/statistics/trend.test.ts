import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { mannKendall } from '../../../core/statistics/mann-kendall.ts'
import { theilSen } from '../../../core/statistics/theil-sen.ts'
import { matchReference } from './reference.ts'

const series = fc.array(fc.integer({ min: -30, max: 30 }), { minLength: 2, maxLength: 40 })

describe('mannKendall', () => {
  matchReference('mann-kendall.json', ({ y }) => {
    const t = mannKendall(y)
    return { s: t.s, var_s: t.variance, z: t.z, p: t.p, tau_b: t.tau, p_exact: t.pExact }
  })

  it('counts pairs as the definition does', () => {
    fc.assert(
      fc.property(series, (y) => {
        let s = 0
        y.forEach((a, i) => {
          for (const b of y.slice(i + 1)) s += Math.sign(b - a)
        })
        expect(mannKendall(y).s).toBe(s)
      }),
    )
  })

  it('turns round with time and refuses gaps', () => {
    expect(mannKendall([1, 5, 2, 8]).s).toBe(-mannKendall([8, 2, 5, 1]).s)
    expect(() => mannKendall([1, Number.NaN])).toThrow(expect.objectContaining({ code: 'not_finite' }))
  })
})

describe('theilSen', () => {
  // The file gives null for one point; ours throws (see below).
  matchReference(
    'theil-sen.json',
    ({ x, y, confidence }) => {
      const t = theilSen(x, y, { confidence })
      return { slope: t.slope, intercept: t.intercept, lower: t.low, upper: t.high, pairs: t.pairs }
    },
    { except: ['one point'] },
  )

  it('follows a shear, a shift and a change of scale', () => {
    fc.assert(
      fc.property(series, (y) => {
        const x = y.map((_, i) => i)
        const plain = theilSen(x, y)
        const sheared = theilSen(
          x,
          y.map((v, i) => 2 * v + 3 * i + 5),
        )
        expect(sheared.slope).toBeCloseTo(2 * plain.slope + 3, 9)
      }),
    )
  })

  it.each([
    ['too_few_values', [1], [2]],
    ['too_few_values', [1, 1], [2, 3]],
    ['unequal_lengths', [1, 2], [2]],
    ['out_of_range', new Array(3001).fill(0), new Array(3001).fill(0)],
  ])('throws %s', (code, x, y) => {
    expect(() => theilSen(x, y)).toThrow(expect.objectContaining({ code }))
  })
})
