import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { eventCoincidence } from '../../../core/statistics/event-coincidence.ts'
import { matchReference } from './reference.ts'

describe('eventCoincidence', () => {
  matchReference('event-coincidence.json', ({ a, b, delta_t, tau, span }) => {
    const e = eventCoincidence(a, b, { window: delta_t, lag: tau, span })
    return {
      precursor_coincidences: e.precursorCoincidences,
      trigger_coincidences: e.triggerCoincidences,
      precursor_rate: e.precursorRate,
      trigger_rate: e.triggerRate,
      precursor_probability: e.precursorProbability,
      trigger_probability: e.triggerProbability,
      precursor_p: e.precursorP,
      trigger_p: e.triggerP,
    }
  })

  it('counts as the definition does and ignores order', () => {
    const times = fc.array(fc.integer({ min: 0, max: 99 }), { maxLength: 15 })
    fc.assert(
      fc.property(times, times, fc.integer({ min: 0, max: 9 }), fc.integer({ min: 0, max: 9 }), (a, b, window, lag) => {
        const e = eventCoincidence(a, b, { window, lag, span: 100 })
        const met = (x: number, y: number): boolean => x - lag - y >= 0 && x - lag - y <= window
        expect(e.precursorCoincidences).toBe(a.filter((x) => b.some((y) => met(x, y))).length)
        expect(e.triggerCoincidences).toBe(b.filter((y) => a.some((x) => met(x, y))).length)
      }),
    )
  })

  it('refuses a window longer than the span', () => {
    expect(() => eventCoincidence([1], [1], { window: 9, span: 5 })).toThrow(
      expect.objectContaining({ code: 'out_of_range' }),
    )
  })
})
