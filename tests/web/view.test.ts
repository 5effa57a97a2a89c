import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { gapsOf } from '../../web/strip/gaps.ts'
import { valueAt } from '../../web/strip/value-at.ts'
import { LEAST_SPAN, moved, spanOf, timeAt, within, xOf, zoomed } from '../../web/strip/view.ts'

const WHOLE = Object.freeze({ from: 0, to: 7 * 86_400_000 })

describe('zooming and moving', () => {
  const share = fc.double({ min: 0, max: 1, noNaN: true })

  it('keeps the instant under the pointer where it is, as long as no edge is met', () => {
    const view = { from: 200_000_000, to: 300_000_000 }
    const anchor = 230_000_000
    const after = zoomed(view, WHOLE, 0.5, anchor)
    expect(spanOf(after)).toBeCloseTo(50_000_000, 3)
    expect(xOf(anchor, after, 1_000)).toBeCloseTo(xOf(anchor, view, 1_000), 6)
  })

  it('never leaves the whole and never gets finer than the least span', () => {
    fc.assert(
      fc.property(share, share, fc.double({ min: 0.001, max: 100, noNaN: true }), (a, b, factor) => {
        const view = within({ from: a * WHOLE.to, to: a * WHOLE.to + b * WHOLE.to }, WHOLE)
        for (const after of [zoomed(view, WHOLE, factor, (view.from + view.to) / 2), moved(view, WHOLE, factor - 1)]) {
          // One microsecond of rounding on a week.
          expect(after.from).toBeGreaterThanOrEqual(WHOLE.from - 1e-3)
          expect(after.to).toBeLessThanOrEqual(WHOLE.to + 1e-3)
          expect(spanOf(after)).toBeGreaterThanOrEqual(LEAST_SPAN - 1e-3)
        }
      }),
    )
  })

  it('turns places into times and back', () => {
    expect(timeAt(xOf(123_456, WHOLE, 777), WHOLE, 777)).toBeCloseTo(123_456, 4)
  })
})

describe('reading the trace', () => {
  const trace = Object.freeze({ t: [10, 20, 21, 40], v: [1, 2, null, 3], exact: true, stored: 3 })

  it('says the last value at or before, nothing in a gap or outside', () => {
    expect([5, 10, 15, 20, 30, 40, 41].map((t) => valueAt(trace, t))).toEqual([null, 1, 1, 2, null, 3, null])
  })

  it('finds gaps from reading to reading', () => {
    expect(gapsOf(trace)).toEqual([{ from: 20, to: 40 }])
  })
})
