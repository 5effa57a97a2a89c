import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { quantile } from '../../../core/statistics/quantile.ts'
import { weightedQuantile, weightedQuantiles } from '../../../core/statistics/weighted-quantile.ts'
import { matchReference } from './reference.ts'

const values = fc.array(fc.double({ min: -1e6, max: 1e6, noNaN: true }), { minLength: 1, maxLength: 40 })
const share = fc.double({ min: 0, max: 1, noNaN: true })

describe('quantile', () => {
  // The file gives null for no value; ours throws (see below).
  matchReference(
    'quantiles.json',
    ({ x, p }) => ({
      type7: p.map((q: number) => quantile(x, q, 7)),
      type8: p.map((q: number) => quantile(x, q, 8)),
    }),
    { except: ['no value'] },
  )

  it('mirrors when the values are negated', () => {
    fc.assert(
      fc.property(values, share, (x, p) => {
        const mirrored = quantile(
          x.map((v) => -v),
          1 - p,
        )
        expect(quantile(x, p)).toBeCloseTo(-mirrored, 6)
      }),
    )
  })

  it('throws for no value, for gaps and for p outside 0 to 1', () => {
    expect(() => quantile([], 0.5)).toThrow(expect.objectContaining({ code: 'too_few_values' }))
    expect(() => quantile([1, Number.NaN], 0.5)).toThrow(expect.objectContaining({ code: 'not_finite' }))
    expect(() => quantile([1], 1.01)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})

describe('weightedQuantile', () => {
  it('is quantile type 8 when all weights are equal', () => {
    fc.assert(
      fc.property(values, share, fc.double({ min: 0.001, max: 1000, noNaN: true }), (x, p, w) => {
        const got = weightedQuantile(
          x,
          x.map(() => w),
          p,
        )
        expect(Math.abs(got - quantile(x, p))).toBeLessThanOrEqual(1e-6)
      }),
    )
  })

  it('mirrors, ignores order and zero weights, and does not feel the unit of the weights', () => {
    const pairs = fc.array(fc.tuple(fc.integer({ min: -1000, max: 1000 }), fc.integer({ min: 1, max: 50 })), {
      minLength: 1,
      maxLength: 30,
    })
    fc.assert(
      fc.property(pairs, share, (list, p) => {
        const x = list.map((a) => a[0])
        const w = list.map((a) => a[1])
        const got = weightedQuantile(x, w, p)
        expect(
          -weightedQuantile(
            x.map((v) => -v),
            w,
            1 - p,
          ),
        ).toBeCloseTo(got, 7)
        expect(weightedQuantile([...x].reverse(), [...w].reverse(), p)).toBeCloseTo(got, 7)
        expect(weightedQuantile([...x, 5000], [...w, 0], p)).toBe(got)
        expect(
          weightedQuantile(
            x,
            w.map((v) => v * 3.6e6),
            p,
          ),
        ).toBeCloseTo(got, 7)
      }),
    )
  })

  it('does not follow a logger that speeds up', () => {
    // 100 h at 1 mA read once an hour, then 1 h at 9 mA read each second: 9 mA held 1 % of the time.
    const x = [...new Array(100).fill(1), ...new Array(3600).fill(9)]
    const w = [...new Array(100).fill(1), ...new Array(3600).fill(1 / 3600)]
    expect(weightedQuantiles(x, w, [0.5, 0.98, 0.995])).toEqual([1, 1, 9])
    expect(quantile(x, 0.5)).toBe(9)
  })

  it.each([
    ['too_few_values', [1], [0]],
    ['unequal_lengths', [1, 2], [1]],
    ['out_of_range', [1, 2], [1, -1]],
    ['not_finite', [1, Number.NaN], [1, 1]],
  ])('throws %s', (code, x, w) => {
    expect(() => weightedQuantile(x, w, 0.5)).toThrow(expect.objectContaining({ code }))
  })
})
