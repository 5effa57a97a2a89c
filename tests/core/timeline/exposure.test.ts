import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import {
  afterEdges,
  both,
  clipExposure,
  type Exposure,
  edgesOf,
  either,
  fillUnknown,
  hoursOff,
  hoursOn,
  knownOf,
  not,
  type State,
  stateAt,
  stateBefore,
} from '../../../core/timeline/exposure.ts'
import { intersect, spansOf } from '../../../core/timeline/spans.ts'

const END = 30
const states = fc.array(fc.constantFrom<State>('on', 'off', 'unknown'), { minLength: END, maxLength: END })

/** A step function from one state a millisecond. */
const exposureOf = (list: readonly State[]): Exposure => ({
  on: spansOf(list.flatMap((s, i) => (s === 'on' ? [[i, i + 1] as const] : []))),
  off: spansOf(list.flatMap((s, i) => (s === 'off' ? [[i, i + 1] as const] : []))),
})
const listOf = (e: Exposure): State[] => Array.from({ length: END }, (_, i) => stateAt(e, i))

describe('three-valued logic', () => {
  it('follows Kleene: off and unknown is off, on or unknown is on', () => {
    fc.assert(
      fc.property(states, states, (a, b) => {
        const [x, y] = [exposureOf(a), exposureOf(b)]
        expect(listOf(x)).toEqual(a)
        expect(listOf(both(x, y))).toEqual(
          a.map((s, i) => (s === 'off' || b[i] === 'off' ? 'off' : s === 'on' && b[i] === 'on' ? 'on' : 'unknown')),
        )
        expect(either(x, y)).toEqual(not(both(not(x), not(y))))
        expect(listOf(fillUnknown(x, y))).toEqual(a.map((s, i) => (s === 'unknown' ? b[i] : s)))
        expect(intersect(x.on, x.off)).toHaveLength(0)
      }),
    )
  })

  it('tells the state up to an instant', () => {
    fc.assert(
      fc.property(states, (a) => {
        const x = exposureOf(a)
        for (let i = 1; i <= END; i++) expect(stateBefore(x, i)).toBe(a[i - 1])
        expect(stateBefore(x, 0)).toBe('unknown')
      }),
    )
  })

  it('finds edges exactly where on and off meet', () => {
    fc.assert(
      fc.property(states, (a) => {
        const wanted = a.flatMap((s, at) =>
          at > 0 && s !== a[at - 1] && s !== 'unknown' && a[at - 1] !== 'unknown' ? [{ at, on: s === 'on' }] : [],
        )
        expect(edgesOf(exposureOf(a))).toEqual(wanted)
      }),
    )
  })
})

describe('time within an exposure', () => {
  const e: Exposure = { on: spansOf([[0, 7_200_000]]), off: spansOf([[10_800_000, 14_400_000]]) }

  it('counts hours and clips', () => {
    expect([hoursOn(e), hoursOff(e)]).toEqual([2, 1])
    const inside = clipExposure(e, spansOf([[3_600_000, 12_600_000]]))
    expect([hoursOn(inside), hoursOff(inside)]).toEqual([1, 0.5])
    expect([...knownOf(inside)]).toEqual([3_600_000, 7_200_000, 10_800_000, 12_600_000])
  })
})

describe('afterEdges', () => {
  const edges = [{ at: 10 }, { at: 12 }, { at: 40 }]

  it('holds for the window after each change', () => {
    const e = afterEdges(edges, 0, 42, 5)
    expect([...e.on]).toEqual([10, 17, 40, 42])
    expect([...e.off]).toEqual([0, 10, 17, 40])
  })

  it('is unknown where a change may have passed unseen less than a window ago', () => {
    const e = afterEdges(
      edges,
      0,
      42,
      5,
      spansOf([
        [0, 20],
        [30, 42],
      ]),
    )
    expect([...e.on]).toEqual([10, 17, 40, 42])
    // Nobody saw what was before 0, nor from 20 to 30: five more are unknown after each.
    expect([...e.off]).toEqual([5, 10, 17, 20, 35, 40])
  })
})
