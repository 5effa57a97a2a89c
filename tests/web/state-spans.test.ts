import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { laneBlocks } from '../../web/strip/lane-blocks.ts'
import { lanesOf } from '../../web/strip/lanes.ts'
import { offWhere, type StateSpan, spansOfChanges, spansOfTrace, stateAt, tally } from '../../web/strip/state-spans.ts'

const trace = (t: number[], v: (number | null)[]) => Object.freeze({ t, v, exact: true, stored: t.length })

describe('spansOfChanges', () => {
  it('keeps the state from before until the first change', () => {
    expect(spansOfChanges([{ at: 40, on: false }], 'on', 0, 100)).toEqual([
      { from: 0, to: 40, state: 'on' },
      { from: 40, to: 100, state: 'off' },
    ])
  })

  it('takes a change before the period as the state at its beginning', () => {
    expect(spansOfChanges([{ at: -5, on: true }], 'unknown', 0, 10)).toEqual([{ from: 0, to: 10, state: 'on' }])
  })
})

describe('spansOfTrace', () => {
  it('holds each reading until the next; gaps, before and after are not known', () => {
    expect(spansOfTrace(trace([10, 20, 30, 40, 50], [1, 1, 0, null, 1]), 0, 60)).toEqual([
      { from: 0, to: 10, state: 'unknown' },
      { from: 10, to: 30, state: 'on' },
      { from: 30, to: 40, state: 'off' },
      { from: 40, to: 60, state: 'unknown' },
    ])
  })
})

describe('offWhere', () => {
  const state = fc.constantFrom('on' as const, 'off' as const, 'unknown' as const)
  const spans = fc
    .array(fc.tuple(fc.integer({ min: 1, max: 20 }), state), { minLength: 1, maxLength: 12 })
    .map((pieces) => {
      let at = 0
      return pieces.map(([long, one]): StateSpan => {
        const span = { from: at, to: at + long, state: one }
        at += long
        return span
      })
    })

  it('is off where the mask is off and as before elsewhere, at every instant', () => {
    fc.assert(
      fc.property(spans, spans, (own, mask) => {
        const result = offWhere(own, mask)
        for (let t = 0; t < own[own.length - 1]!.to; t++) {
          const expected = stateAt(mask, t) === 'off' ? 'off' : stateAt(own, t)
          expect(stateAt(result, t)).toBe(expected)
        }
      }),
    )
  })

  it('loses no time', () => {
    fc.assert(
      fc.property(spans, spans, (own, mask) => {
        const { on, off, unknown } = tally(offWhere(own, mask))
        expect(on + off + unknown).toBe(own[own.length - 1]!.to)
      }),
    )
  })
})

describe('laneBlocks', () => {
  it('shows a start that is shorter than a pixel', () => {
    const spans: StateSpan[] = [
      { from: 0, to: 500, state: 'off' },
      { from: 500, to: 501, state: 'on' },
      { from: 501, to: 10_000, state: 'off' },
    ]
    const blocks = laneBlocks(spans, { from: 0, to: 10_000 }, 100)
    expect(blocks.filter((block) => block.state === 'on')).toEqual([{ x: 5, width: 1, state: 'on' }])
  })

  it('covers the whole width', () => {
    const blocks = laneBlocks([{ from: 30, to: 60, state: 'on' }], { from: 0, to: 100 }, 50)
    expect(blocks).toEqual([
      { x: 0, width: 15, state: 'unknown' },
      { x: 15, width: 15, state: 'on' },
      { x: 30, width: 20, state: 'unknown' },
    ])
  })
})

describe('lanesOf', () => {
  it('counts circuits as on and loads as unknown until told, and switches loads off with their circuit', () => {
    const lanes = lanesOf({
      rcd: {
        ref: 'A',
        ratedMa: 30,
        type: 'A',
        delay: 'general',
        circuits: [{ ref: '7', isolation: 'single-pole', loads: [{ ref: 'mixer' }, { ref: 'oven' }] }],
      },
      channels: [{ ref: 'mixer-runs', quantity: 'running', load: 'mixer' }],
      running: new Map([['mixer-runs', trace([0, 100], [1, 1])]]),
      changes: new Map([['circuit:7', [{ at: 60, on: false }]]]),
      open: [{ from: 10, to: 20 }],
      span: { from: 0, to: 100 },
      nameOf: (of) => of,
    })
    expect(lanes.map((lane) => [lane.of, lane.source])).toEqual([
      ['circuit:7', 'written'],
      ['load:mixer', 'running'],
      ['load:oven', 'none'],
    ])
    expect([5, 15, 30, 80].map((t) => stateAt(lanes[0]!.spans, t))).toEqual(['on', 'off', 'on', 'off'])
    expect([5, 15, 30, 80].map((t) => stateAt(lanes[1]!.spans, t))).toEqual(['on', 'off', 'on', 'off'])
    expect([5, 15, 30, 80].map((t) => stateAt(lanes[2]!.spans, t))).toEqual(['unknown', 'off', 'unknown', 'off'])
  })
})
