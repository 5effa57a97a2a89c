import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { contains, eachSpan } from '../../../core/timeline/spans.ts'
import { nightSpans, sunTimes } from '../../../core/timeline/sun.ts'

const M = 60_000
const D = 86_400_000

describe('sunTimes', () => {
  // Published to the minute in common almanacs; quoted from memory. Tolerance: one minute of rounding and one of method.
  it.each([
    ['Greenwich, midsummer 2024', '2024-06-20T12:00Z', 51.4779, 0, '2024-06-20T03:43Z', '2024-06-20T20:21Z'],
    ['Greenwich, midwinter 2024', '2024-12-21T12:00Z', 51.4779, 0, '2024-12-21T08:04Z', '2024-12-21T15:53Z'],
    ['New York, midsummer 2024', '2024-06-21T17:00Z', 40.7128, -74.006, '2024-06-21T09:25Z', '2024-06-22T00:31Z'],
    ['Sydney, midsummer 2024', '2024-12-21T02:00Z', -33.8688, 151.2093, '2024-12-20T18:41Z', '2024-12-21T09:05Z'],
  ])('of %s', (_, noon, latitude, longitude, sunrise, sunset) => {
    const sun = sunTimes(Date.parse(noon), latitude, longitude)
    expect(Math.abs(sun.sunrise! - Date.parse(sunrise))).toBeLessThan(2 * M)
    expect(Math.abs(sun.sunset! - Date.parse(sunset))).toBeLessThan(2 * M)
  })

  it('has neither in polar day and polar night', () => {
    // Tromsø: sun up from about 18 May to 26 July, down from about 26 November to 15 January (from memory).
    expect(sunTimes(Date.parse('2024-06-20T12:00Z'), 69.65, 18.96)).toMatchObject({
      sunrise: null,
      sunset: null,
      polar: 'up',
    })
    expect(sunTimes(Date.parse('2024-12-20T12:00Z'), 69.65, 18.96)).toMatchObject({ sunrise: null, polar: 'down' })
  })

  it('is about twelve hours apart everywhere at an equinox, and six minutes and a half more on the equator', () => {
    const { sunrise, sunset } = sunTimes(Date.parse('2024-03-20T12:00Z'), 0, 0)
    // By hand: 4 · 0.833° = 3.3 minutes on both sides.
    expect((sunset! - sunrise!) / M).toBeCloseTo(720 + 2 * 4 * 0.833, 0)
  })

  it('belongs to the day by the sun at any longitude', () => {
    const where = fc.tuple(
      fc.integer({ min: 0, max: 5_000 }),
      fc.integer({ min: -60, max: 60 }),
      fc.integer({ min: -180, max: 180 }),
    )
    fc.assert(
      fc.property(where, ([day, latitude, longitude]) => {
        const t = Date.UTC(2020, 0, 1) + day * 6 * 3_600_000
        const { sunrise, sunset, noon } = sunTimes(t, latitude, longitude)
        expect(sunrise).toBeLessThan(noon)
        expect(sunset).toBeGreaterThan(noon)
        expect(Math.abs(t - noon)).toBeLessThan(D / 2 + 20 * M)
      }),
    )
  })
})

describe('nightSpans', () => {
  it('is the time from each sunset to the next sunrise', () => {
    const from = Date.parse('2026-09-21T12:00Z')
    const night = nightSpans(from, from + 2 * D, 47.3, 13.4)
    expect([...eachSpan(night)]).toHaveLength(2)
    for (const t of [from, from + D]) expect(contains(night, sunTimes(t, 47.3, 13.4).sunset! + M)).toBe(true)
    expect(contains(night, sunTimes(from + D, 47.3, 13.4).sunrise! + M)).toBe(false)
  })

  it('is nothing in polar day and everything in polar night', () => {
    const june = Date.parse('2024-06-10T00:00Z')
    const december = Date.parse('2024-12-10T00:00Z')
    expect([...nightSpans(june, june + 10 * D, 69.65, 18.96)]).toEqual([])
    expect([...nightSpans(december, december + 10 * D, 69.65, 18.96)]).toEqual([december, december + 10 * D])
  })
})
