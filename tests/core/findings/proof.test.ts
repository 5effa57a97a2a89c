import { describe, expect, it } from 'vitest'
import { coverage } from '../../../core/findings/coverage.ts'
import { proof } from '../../../core/findings/proof.ts'
import { spansOf } from '../../../core/timeline/spans.ts'
import { HOUR, MINUTE, START, timelineOf, tripAt } from './timeline-of.ts'

const remedy = (hours: number) => ({ id: `r${hours}`, at: START + hours * HOUR, rcd: 'A', done: 'element replaced' })
const trips = (hours: readonly number[]) => hours.map((h) => tripAt(START + h * HOUR))

describe('proof', () => {
  it('weighs the quiet spell against the rate before', () => {
    const found = proof(timelineOf({ days: 10, trips: trips([10, 40, 70, 100]), remedies: [remedy(120)] }))
    // Jeffreys: Gamma(4.5, 120 h); (120 / 240)^4.5 = 0.0441942; 120 (0.05^(-1/4.5) - 1) = 113.508 h, less than 120.
    expect(found).toMatchObject({ remedyAt: '2026-09-26T00:00:00Z', quietHours: 120, hoursTo95: 0 })
    expect(found.confidenceFixed).toBeCloseTo(1 - 0.5 ** 4.5, 6)
  })

  it('says how many hours are still needed', () => {
    const found = proof(timelineOf({ days: 7, trips: trips([10, 40, 70, 100]), remedies: [remedy(120)] }))
    expect(found.hoursTo95).toBeCloseTo(120 * (0.05 ** (-1 / 4.5) - 1) - 48, 2)
    expect(found.text).toMatch(/more without one make it 95 %/)
  })

  it('does not count hours without supply as quiet', () => {
    const energised = spansOf([[START, START + 130 * HOUR]])
    const found = proof(timelineOf({ days: 10, energised, trips: trips([10]), remedies: [remedy(120)] }))
    expect(found.quietHours).toBe(10)
  })

  it('goes by the latest remedy and says when trips came after it', () => {
    const found = proof(timelineOf({ days: 7, trips: trips([10, 40, 130]), remedies: [remedy(20), remedy(120)] }))
    expect(found).toMatchObject({
      remedyAt: '2026-09-26T00:00:00Z',
      quietHours: 38,
      confidenceFixed: 0,
      hoursTo95: null,
    })
    expect(found.text).toMatch(/One trip in 2 days since the remedy: it is not fixed/)
  })

  it('counts repeats soon after closing again once', () => {
    const first = tripAt(START + 10 * HOUR)
    const again = tripAt(first.restoredAt! + 2 * MINUTE)
    const once = proof(timelineOf({ days: 7, trips: [first], remedies: [remedy(120)] }))
    expect(proof(timelineOf({ days: 7, trips: [first, again], remedies: [remedy(120)] }))).toEqual(once)
  })

  it('has words for no remedy and for no trip before it', () => {
    expect(proof(timelineOf({ days: 7 }))).toMatchObject({ remedyAt: null, confidenceFixed: null })
    const found = proof(timelineOf({ days: 7, remedies: [remedy(20)] }))
    expect(found).toMatchObject({ confidenceFixed: null, hoursTo95: null, quietHours: 148 })
    // Rule of three: 2.9957 / 148 h × 168 h = 3.40 a week.
    expect(found.text).toMatch(/fewer than 3\.4 a week/)
  })
})

describe('coverage', () => {
  it('counts energised hours, logged hours, trips and gaps', () => {
    const energised = spansOf([[START, START + 20 * HOUR]])
    const gaps = [{ channel: 'tails', from: START + HOUR, to: START + 2 * HOUR }]
    expect(
      coverage(timelineOf({ days: 1, energised, logged: spansOf([[START, START + HOUR]]), gaps, trips: trips([3]) })),
    ).toEqual({
      energisedHours: 20,
      readingHours: 1,
      trips: 1,
      gaps: [{ channel: 'tails', from: '2026-09-21T01:00:00Z', to: '2026-09-21T02:00:00Z' }],
    })
  })
})
