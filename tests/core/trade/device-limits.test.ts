import { describe, expect, it } from 'vitest'
import {
  ADVISED_SHARE,
  breakTimes,
  pulsatingTripRange,
  sinusoidalTripRange,
  toleratedSmoothDcMa,
} from '../../../core/trade/device-limits.ts'

// Limits of IEC 61008-1, IEC 61009-1, IEC 62423 and BS 7671 as quoted from memory; products worked out by hand.
describe('limits of a device', () => {
  it.each([
    [30, 15, 30],
    [10, 5, 10],
    [300, 150, 300],
  ])('of %i mA may trip on a.c. between %d and %d mA', (rated, low, high) => {
    expect(sinusoidalTripRange(rated)).toEqual({ low, high })
  })

  it.each([
    [30, 0, 10.5, 42],
    [30, 90, 7.5, 42],
    [30, 135, 3.3, 42],
    [10, 0, 3.5, 20],
  ] as const)('of %i mA type A at %i° may trip on pulsating d.c. between %d and %d mA', (rated, angle, low, high) => {
    const range = pulsatingTripRange(rated, 'A', angle)!
    expect(range.low).toBeCloseTo(low, 12)
    expect(range.high).toBeCloseTo(high, 12)
  })

  it('promises nothing on pulsating d.c. for type AC', () => {
    expect(pulsatingTripRange(30, 'AC')).toBeNull()
  })

  it('tolerates 6 mA of smooth d.c. as type A and 10 mA as type F', () => {
    expect([toleratedSmoothDcMa('AC'), toleratedSmoothDcMa('A'), toleratedSmoothDcMa('F')]).toEqual([0, 6, 10])
    expect(toleratedSmoothDcMa('B')).toBeNull()
  })

  it.each([
    ['general', 1, 300, 0],
    ['general', 2, 150, 0],
    ['general', 7, 40, 0],
    ['S', 1.5, 500, 130],
    ['S', 2, 200, 60],
    ['S', 5, 150, 50],
  ] as const)('type %s at %d times IΔn opens within %i ms', (delay, multiple, largest, leastNonActuating) => {
    expect(breakTimes(delay, multiple)).toEqual({ largest, leastNonActuating })
  })

  it('promises no time below IΔn and refuses nonsense', () => {
    expect(breakTimes('general', 0.99)).toBeNull()
    expect(() => breakTimes('general', Number.NaN)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })

  it('plans for 9 mA of standing leakage at most behind 30 mA', () => {
    expect(ADVISED_SHARE * 30).toBe(9)
  })
})
