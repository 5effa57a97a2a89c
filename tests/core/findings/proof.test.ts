import { describe, expect, it } from 'vitest'
import type { TripFinding } from '../../../core/contract/findings.ts'
import { coverage } from '../../../core/findings/coverage.ts'
import { proof } from '../../../core/findings/proof.ts'
import { seriesOf } from '../../../core/timeline/series.ts'
import { spansOf } from '../../../core/timeline/spans.ts'
import { HOUR, loadOn, MINUTE, START, timelineOf, tripAt } from './timeline-of.ts'

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

describe('several remedies', () => {
  const done = (hours: number, what: string, of?: string) => ({
    id: `r${hours}`,
    at: START + hours * HOUR,
    rcd: 'A',
    done: what,
    ...(of === undefined ? {} : { of }),
  })

  it('are each set against the time since the one before', () => {
    const found = proof(
      timelineOf({
        days: 30,
        trips: trips([10, 40, 70, 100, 150, 200, 250, 300]),
        remedies: [done(120, 'element replaced'), done(320, 'gland sealed')],
      }),
    )
    expect(found.remedies).toHaveLength(2)
    const [first, second] = found.remedies!
    expect(first!.rate).toMatchObject({ tripsBefore: 4, hoursBefore: 120, tripsAfter: 4, hoursAfter: 200 })
    expect(first!.confidenceFixed).toBe(0)
    expect(first!.text).toMatch(/^Element replaced: Four trips in 8\.33 days since the remedy: it is not fixed/)
    expect(second!.rate).toMatchObject({ tripsBefore: 4, hoursBefore: 200, tripsAfter: 0, hoursAfter: 400 })
    // Gamma(4.5, 200 h): 1 - (200 / 600)^4.5
    expect(second!.confidenceFixed).toBeCloseTo(1 - (1 / 3) ** 4.5, 5)
    expect(found.confidenceFixed).toBe(second!.confidenceFixed)
  })

  it('look further back where too few trips came in between', () => {
    const found = proof(
      timelineOf({
        days: 20,
        trips: trips([10, 40, 70, 100]),
        remedies: [done(120, 'element replaced'), done(200, 'gland sealed')],
      }),
    )
    expect(found.rate).toMatchObject({ tripsBefore: 4, hoursBefore: 200 })
    expect(found.text).toMatch(/too few trips came since/)
  })

  it('cannot be told apart on the same day', () => {
    const found = proof(
      timelineOf({
        days: 20,
        trips: trips([10, 40, 70, 100]),
        remedies: [done(120, 'element replaced'), done(126, 'gland sealed')],
      }),
    )
    expect(found.remedies![0]).toMatchObject({ confidenceFixed: null })
    expect(found.remedies![0]!.text).toMatch(
      /Gland sealed followed within 6 hours under supply: the two cannot be told/,
    )
  })
})

describe('rate before and after', () => {
  it('has exact limits, and the chance of so few', () => {
    const found = proof(timelineOf({ days: 20, trips: trips([10, 40, 70, 100, 300]), remedies: [remedy(120)] }))
    // Given five trips, those after are binomial(5, 360/480): P(X <= 1) = 0.25^5 + 5 · 0.75 · 0.25^4 = 16/1024.
    expect(found.rate!.p).toBeCloseTo(16 / 1024, 6)
    // (1/360) / (4/120)
    expect(found.rate!.ratio).toBeCloseTo(1 / 12, 6)
    // Clopper-Pearson 90 % of 1 in 5: 0.0102062, 0.6574083 (Beta(1, 5) and Beta(2, 4) quantiles), as odds over 3
    expect(found.rate!.low).toBeCloseTo(0.0102062 / (1 - 0.0102062) / 3, 5)
    expect(found.rate!.high).toBeCloseTo(0.6574083 / (1 - 0.6574083) / 3, 5)
  })

  it('leaves a trip somewhere round the remedy on neither side, and says so', () => {
    const across = tripAt(START + 115 * HOUR, START + 125 * HOUR)
    const found = proof(timelineOf({ days: 20, trips: [...trips([10, 40, 70]), across], remedies: [remedy(120)] }))
    expect(found.rate).toMatchObject({ tripsBefore: 3, tripsAfter: 0 })
    expect(found.text).toMatch(/One trip lies somewhere round the remedy and counts on neither side/)
  })

  it('does not change when everything happens a week later', () => {
    const week = 7 * 24 * HOUR
    const a = proof(timelineOf({ days: 20, trips: trips([10, 40, 70]), remedies: [remedy(120)] }))
    const b = proof(
      timelineOf({
        from: START + week,
        days: 20,
        trips: trips([178, 208, 238]),
        remedies: [remedy(120 + 168)],
      }),
    )
    expect({ ...b, remedyAt: null, remedies: null }).toEqual({ ...a, remedyAt: null, remedies: null })
  })
})

describe('a new cause', () => {
  const finding = (course: TripFinding['course']): TripFinding => ({
    id: null,
    at: null,
    after: null,
    before: null,
    levelMa: null,
    usualMa: null,
    course,
    trigger: null,
    shares: [],
    text: '',
  })

  it('shows when the repaired load is off at the trips since', () => {
    const end = START + 20 * 24 * HOUR
    const mixer = loadOn('mixer', [[START, START + 119 * HOUR]], START, end)
    const found = proof(
      timelineOf({
        days: 20,
        things: [mixer],
        trips: trips([10, 40, 70, 200, 300]),
        remedies: [{ id: 'r', at: START + 120 * HOUR, of: 'load:mixer', done: 'unplugged' }],
      }),
    )
    expect(found.newCause!.text).toMatch(/^Mixer was off at all two trips since the remedy/)
    expect(found.text).toMatch(/something else/)
  })

  it('shows when the trips look different', () => {
    const at = [10, 30, 50, 70, 90, 100, 200, 230, 260, 290]
    const courses = at.map((h) => finding(h < 120 ? 'step' : 'sudden'))
    const given = timelineOf({ days: 20, trips: trips(at), remedies: [remedy(120)] })
    const found = proof(given, courses)
    // Fisher: one table of 10! / (6! 4!) = 210
    expect(found.newCause!.figures.p).toBeCloseTo(1 / 210, 6)
    expect(found.newCause!.text).toMatch(/4 of 4 came without a warning in the log, before it 0 of 6/)
    expect(
      proof(
        given,
        at.map(() => finding('step')),
      ).newCause,
    ).toBeNull()
  })

  it('shows when the trips no longer fall into the time of the first suspect', () => {
    const at = [10, 30, 50, 70, 90, 100, 200, 230, 260]
    const given = timelineOf({ days: 20, trips: trips(at), remedies: [remedy(120)] })
    const inside = spansOf(at.slice(0, 6).map((h) => [START + (h - 1) * HOUR, START + h * HOUR] as const))
    const known = given.energised
    const found = proof(given, [], { inside, known, words: 'while it ran' })
    // Fisher: one table of 9! / (6! 3!) = 84
    expect(found.newCause!.figures.p).toBeCloseTo(1 / 84, 6)
    expect(found.newCause!.text).toMatch(/^Before the remedy 6 of 6 trips fell while it ran, since then 0 of 3/)
    expect(proof(given, [], { inside: known, known, words: 'always' }).newCause).toBeNull()
  })

  it('shows when the level rises after the remedy', () => {
    const n = 20 * 24
    const t = Array.from({ length: n }, (_, i) => START + i * HOUR)
    const leakage = seriesOf(
      t,
      t.map((_, i) => 9 + (i > 240 ? 0.005 * (i - 240) : 0) + 0.05 * Math.sin(i)),
    )
    const logged = spansOf([[START, START + n * HOUR]])
    const found = proof(timelineOf({ days: 20, leakage, logged, trips: trips([10, 40]), remedies: [remedy(239)] }))
    expect(found.newCause!.text).toMatch(/higher than before the remedy|has risen since the remedy/)
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
