import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { placeFlags, type TripMark } from '../../web/strip/flags.ts'

const VIEW = Object.freeze({ from: 0, to: 1_000 })

describe('placeFlags', () => {
  it('puts flags that do not touch on the lowest row', () => {
    const marks = [
      { number: 1, from: 100, to: 100 },
      { number: 2, from: 500, to: 500 },
    ]
    expect(placeFlags(marks, VIEW, 1_000, 24).map((place) => place.row)).toEqual([0, 0])
  })

  it('gives an interval its bracket', () => {
    const [place] = placeFlags([{ number: 1, from: 200, to: 600 }], VIEW, 500, 24)
    expect(place).toMatchObject({ x0: 100, x1: 300, left: 188 })
  })

  it('leaves out what lies outside the view', () => {
    expect(placeFlags([{ number: 1, from: -50, to: -10 }], VIEW, 500, 24)).toEqual([])
  })

  it('never lets one flag or bracket hide another, and loses none', () => {
    const mark = fc.tuple(fc.integer({ min: 0, max: 1_000 }), fc.integer({ min: 0, max: 300 }))
    fc.assert(
      fc.property(fc.array(mark, { maxLength: 40 }), (pairs) => {
        const marks: TripMark[] = pairs.map(([from, long], i) => ({
          number: i + 1,
          from,
          to: Math.min(1_000, from + long),
        }))
        const places = placeFlags(marks, VIEW, 390, 24)
        expect(places.length).toBe(marks.length)
        for (const a of places) {
          expect(a.left).toBeGreaterThanOrEqual(0)
          expect(a.left + 24).toBeLessThanOrEqual(390)
          for (const b of places) {
            if (a === b || a.row !== b.row) continue
            const [a0, a1] = [Math.min(a.left, a.x0), Math.max(a.left + 24, a.x1)]
            const [b0, b1] = [Math.min(b.left, b.x0), Math.max(b.left + 24, b.x1)]
            expect(a1 <= b0 || b1 <= a0).toBe(true)
          }
        }
      }),
    )
  })
})
