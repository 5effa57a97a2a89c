import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import {
  clip,
  complement,
  contains,
  countSpans,
  eachSpan,
  intersect,
  measureWithin,
  overlapMs,
  type Spans,
  shift,
  spanAt,
  spansOf,
  subtract,
  totalMs,
  union,
  widen,
} from '../../../core/timeline/spans.ts'

const END = 60
const pair = fc.tuple(fc.integer({ min: 0, max: END }), fc.integer({ min: 0, max: END }))
const pairs = fc.array(pair, { maxLength: 12 })
const spans = pairs.map((list) => spansOf(list))

/** The same set as the integers in it: what every law is held against. */
const integers = (set: Spans): Set<number> =>
  new Set(
    Array.from({ length: 3 * END }, (_, i) => i - END).filter((i) =>
      [...eachSpan(set)].some((s) => s.from <= i && i < s.to),
    ),
  )

const same = (set: Spans, wanted: (i: number) => boolean, from = 0, to = END): void => {
  for (let i = 1; i < set.length; i++) expect(set[i]).toBeGreaterThan(set[i - 1]!)
  expect([...integers(set)]).toEqual(Array.from({ length: to - from }, (_, k) => from + k).filter(wanted))
}

describe('overlapMs', () => {
  it('is the length of what two sets share', () => {
    fc.assert(
      fc.property(spans, spans, (a, b) => {
        expect(overlapMs(a, b)).toBe(totalMs(intersect(a, b)))
      }),
    )
  })
})

describe('spansOf', () => {
  it('sorts, merges what overlaps or touches, drops what is empty or backwards', () => {
    expect([
      ...spansOf([
        [5, 7],
        [1, 3],
        [3, 4],
        [6, 9],
        [2, 2],
        [9, 8],
      ]),
    ]).toEqual([1, 4, 5, 9])
  })

  it('holds what the pairs hold, in any order', () => {
    fc.assert(
      fc.property(pairs, (list) => {
        same(spansOf(list), (i) => list.some(([a, b]) => a <= i && i < b))
        expect(spansOf([...list].reverse())).toEqual(spansOf(list))
      }),
    )
  })

  it('refuses times that are not finite', () => {
    expect(() => spansOf([[0, Number.POSITIVE_INFINITY]])).toThrow(expect.objectContaining({ code: 'not_finite' }))
  })
})

describe('set algebra', () => {
  it('agrees with sets of integers', () => {
    fc.assert(
      fc.property(spans, spans, (a, b) => {
        const inA = integers(a)
        const inB = integers(b)
        same(union(a, b), (i) => inA.has(i) || inB.has(i))
        same(intersect(a, b), (i) => inA.has(i) && inB.has(i))
        same(subtract(a, b), (i) => inA.has(i) && !inB.has(i))
        same(complement(a, 10, 50), (i) => !inA.has(i), 10, 50)
        same(clip(a, 10, 50), (i) => inA.has(i), 10, 50)
      }),
    )
  })

  it('keeps the laws of De Morgan, idempotence, commutativity, and additivity of measure', () => {
    fc.assert(
      fc.property(spans, spans, (a, b) => {
        const not = (s: Spans): Spans => complement(s, 0, END)
        expect(not(union(a, b))).toEqual(intersect(not(a), not(b)))
        expect(not(intersect(a, b))).toEqual(union(not(a), not(b)))
        expect(union(a, a)).toEqual(a)
        expect(intersect(a, a)).toEqual(a)
        expect(union(a, b)).toEqual(union(b, a))
        expect(intersect(a, b)).toEqual(intersect(b, a))
        expect(totalMs(union(a, b)) + totalMs(intersect(a, b))).toBe(totalMs(a) + totalMs(b))
        expect(not(not(a))).toEqual(a)
      }),
    )
  })

  it('leaves its inputs alone and gives fresh sets', () => {
    const a = spansOf([[1, 5]])
    const b = spansOf([])
    union(a, b)[0] = 99
    subtract(a, b)[0] = 99
    expect([...a]).toEqual([1, 5])
  })
})

describe('moving and asking', () => {
  it('shifts and widens', () => {
    expect([
      ...shift(
        spansOf([
          [1, 3],
          [5, 6],
        ]),
        10,
      ),
    ]).toEqual([11, 13, 15, 16])
    expect([
      ...widen(
        spansOf([
          [1, 3],
          [5, 6],
        ]),
        1,
        1,
      ),
    ]).toEqual([0, 7])
    expect([
      ...widen(
        spansOf([
          [1, 3],
          [5, 6],
        ]),
        0,
        -1,
      ),
    ]).toEqual([1, 2])
  })

  it('finds and measures as counting does', () => {
    fc.assert(
      fc.property(spans, pair, (a, [from, to]) => {
        const inA = integers(a)
        for (let i = 0; i < END; i++) {
          expect(contains(a, i)).toBe(inA.has(i))
          const span = spanAt(a, i)
          expect(span !== undefined && span.from <= i && i < span.to).toBe(inA.has(i))
        }
        expect(measureWithin(a, from, to)).toBe([...inA].filter((i) => i >= from && i < to).length)
        expect(countSpans(a)).toBe([...eachSpan(a)].length)
      }),
    )
  })
})
