import { describe, expect, it } from 'vitest'
import type { BudgetLine } from '../../../core/contract/findings.ts'
import { headroom } from '../../../core/findings/headroom.ts'
import { tripFacts } from '../../../core/findings/trip-facts.ts'
import { tripFindings } from '../../../core/findings/trips.ts'
import { seededRandom } from '../../../core/statistics/random.ts'
import { seriesOf } from '../../../core/timeline/series.ts'
import { spansOf } from '../../../core/timeline/spans.ts'
import type { Thing, Timeline } from '../../../core/timeline/timeline.ts'
import { HOUR, loadOn, MINUTE, START, timelineOf, tripAt } from './timeline-of.ts'

const AT = START + 10 * HOUR

/** Twelve hours at one reading in five seconds; at `AT` the device opens for half an hour. */
function logged(level: (secondsBefore: number) => number, given: Partial<Timeline> = {}): Timeline {
  const random = seededRandom('readings')
  const n = (12 * HOUR) / 5_000
  const t = Array.from({ length: n }, (_, i) => START + i * 5_000)
  const v = t.map((ms) => (ms >= AT && ms < AT + 30 * MINUTE ? 0 : level((AT - ms) / 1_000) + random.normal(0, 0.02)))
  const energised = spansOf([
    [START, AT],
    [AT + 30 * MINUTE, START + 12 * HOUR],
  ])
  return timelineOf({
    to: START + 12 * HOUR,
    leakage: seriesOf(t, v),
    energised,
    logged: energised,
    trips: [tripAt(AT)],
    ...given,
  })
}

function lineOf(of: string, ma: number): BudgetLine {
  return { of, ma, low: ma - 0.1, high: ma + 0.1, basis: 'switching', switchings: 10 }
}

const find = (timeline: Timeline, lines: readonly BudgetLine[] = []) =>
  tripFindings(timeline, lines, headroom(timeline))[0]!

const run = (ref: string, secondsBefore: number, until = 0) =>
  loadOn(ref, [[AT - secondsBefore * 1_000, AT - until * 1_000]], START, START + 12 * HOUR)

describe('course of a trip', () => {
  it('is sudden when the level was sound', () => {
    const found = find(logged(() => 8))
    expect(found).toMatchObject({ course: 'sudden', trigger: null, at: '2026-09-21T10:00:00Z' })
    expect(found.levelMa).toBeCloseTo(8, 0)
    expect(found.usualMa).toBeCloseTo(8, 1)
    expect(found.text).toMatch(/no warning in the log/)
  })

  it('is a step when the level rose in the last seconds', () => {
    const found = find(logged((s) => (s > 0 && s <= 42 ? 11.4 : 8.3)))
    expect(found.course).toBe('step')
    expect(found.text).toMatch(/^11\.[34]\d? mA before.* 8\.3 mA usual; step of 3\.[01]\d? mA (40|45) s before/)
  })

  it('is a step even when only the last reading shows it', () => {
    expect(find(logged((s) => (s > 0 && s <= 5 ? 14 : 8))).course).toBe('step')
  })

  it('is a creep when the level climbed over most of an hour', () => {
    const found = find(logged((s) => (s > 0 && s < 2_700 ? 8 + (12 * (2_700 - s)) / 2_700 : 8)))
    expect(found.course).toBe('creep')
    expect(found.text).toMatch(/crept up by 0\.2\d+ mA a minute/)
  })

  it('is no creep far below what any device trips at', () => {
    expect(find(logged((s) => (s > 0 && s < 2_700 ? 3 + (2 * (2_700 - s)) / 2_700 : 3))).course).toBe('sudden')
  })

  it('is unseen without readings near, and for an interval of hours', () => {
    expect(find(timelineOf({ days: 1, trips: [tripAt(AT)] }))).toMatchObject({ course: 'unseen', levelMa: null })
    const night = logged(() => 8, { trips: [tripAt(AT - 7 * HOUR, AT)] })
    expect(find(night)).toMatchObject({ course: 'unseen', at: null, after: '2026-09-21T03:00:00Z', shares: [] })
    expect(find(night).text).toMatch(/somewhere in 7 hours/i)
  })

  it('is shared when another device opened within a minute, but not within an hour', () => {
    const other = (ms: number) => [{ ...tripAt(AT + ms), rcd: 'B' }]
    expect(find(logged(() => 8, { otherTrips: other(20_000) }))).toMatchObject({ course: 'shared', trigger: null })
    expect(tripFacts(logged(() => 8, { otherTrips: other(20_000) }))[0]!.sharedWith).toEqual(['B'])
    expect(find(logged(() => 8, { otherTrips: other(HOUR) })).course).toBe('sudden')
  })

  it('is shared when the voltage left its band just before', () => {
    const t = Array.from({ length: 3_600 }, (_, i) => AT - HOUR + i * 1_000)
    const dip = seriesOf(
      t,
      t.map((ms) => (AT - ms < 4_000 ? 180 : 231)),
    )
    expect(tripFacts(logged(() => 8, { voltage: dip }))[0]!.sharedWith).toEqual(['supply'])
    const steady = seriesOf(
      t,
      t.map(() => 231),
    )
    expect(find(logged(() => 8, { voltage: steady })).course).toBe('sudden')
  })

  it('takes the last reading before the fall, not the fall itself', () => {
    const early = logged(() => 8, { trips: [tripAt(AT + 4_000)] })
    expect(tripFacts(early)[0]!.levelMa).toBeCloseTo(8, 0)
  })
})

describe('trigger and shares of a trip', () => {
  it('names what came on round the rise', () => {
    const things = [run('freezer', 44), run('lights', 3_000), run('kettle', 900)]
    const found = find(
      logged((s) => (s > 0 && s <= 42 ? 11.4 : 8.3), { things }),
      [lineOf('load:freezer', 3)],
    )
    expect(found.trigger).toBe('load:freezer')
    expect(found.text).toMatch(/freezer had come on 44 s earlier/)
  })

  it('prefers the larger step of two that came on together', () => {
    const things = [run('small', 30), run('large', 35)]
    const lines = [lineOf('load:small', 0.3), lineOf('load:large', 2)]
    expect(
      find(
        logged((s) => (s > 0 && s <= 30 ? 11 : 8), { things }),
        lines,
      ).trigger,
    ).toBe('load:large')
  })

  it('does not blame a load that came on ten minutes before a sudden trip', () => {
    expect(find(logged(() => 8, { things: [run('mixer', 600)] })).trigger).toBeNull()
    expect(find(logged(() => 8, { things: [run('mixer', 20)] })).trigger).toBe('load:mixer')
  })

  it('blames no load that went off together with another: the device opened before the trip was noted', () => {
    const late = (...things: readonly Thing[]) => find(logged(() => 8, { things })).trigger
    expect(late(run('mixer', 900, 8))).toBe('load:mixer')
    expect(late(run('mixer', 900, 8), run('oven', 4_000, 8))).toBeNull()
    expect(late(run('mixer', 900, 8), run('oven', 4_000, 300))).toBe('load:mixer')
    const circuit: Thing = { ...run('7', 7_200, 8), of: 'circuit:7', kind: 'circuit', circuit: '7' }
    expect(late(circuit, { ...run('mixer', 900, 8), circuit: '7' })).not.toBeNull()
  })

  it('allows a climbing element its minutes', () => {
    const climb = (s: number) => (s > 0 && s < 1_500 ? 8 + (10 * (1_500 - s)) / 1_500 : 8)
    const found = find(logged(climb, { things: [run('defrost', 1_500)] }), [lineOf('load:defrost', 4)])
    expect(found).toMatchObject({ course: 'creep', trigger: 'load:defrost' })
  })

  it('shares the level out among what was on, the largest first', () => {
    const things = [run('a', 4_000), run('b', 5_000), run('c', 9_000, 6_000)]
    const found = find(
      logged(() => 8, { things }),
      [lineOf('load:a', 1), lineOf('load:b', 2.5), lineOf('load:c', 3)],
    )
    expect(found.shares).toEqual([
      { of: 'load:b', ma: 2.5 },
      { of: 'load:a', ma: 1 },
    ])
  })
})

describe('laws', () => {
  it('shifting all by a week shifts only the times', () => {
    const a = logged((s) => (s > 0 && s <= 42 ? 11.4 : 8.3))
    const week = 7 * 24 * HOUR
    const b: Timeline = {
      ...a,
      from: a.from + week,
      to: a.to + week,
      energised: a.energised.map((t) => t + week),
      logged: a.logged.map((t) => t + week),
      leakage: seriesOf(
        a.leakage!.t.map((t) => t + week),
        a.leakage!.v,
      ),
      trips: [tripAt(AT + week)],
    }
    const { at: _a, id: _ida, ...one } = find(a)
    const { at: _b, id: _idb, ...other } = find(b)
    expect(other).toEqual(one)
  })
})

describe('a heater that warms', () => {
  it('is the trigger of a climb of some minutes, not the small load that came on in the middle of it', () => {
    // On seven minutes before; leaks from the third minute on.
    const warm = (s: number) => (s > 0 && s < 300 ? 10 + (12 * (300 - s)) / 300 : 10)
    const things = [run('defrost', 420), run('compressor', 110)]
    const found = find(logged(warm, { things }), [lineOf('load:defrost', 7), lineOf('load:compressor', 0.7)])
    expect(found).toMatchObject({ course: 'step', trigger: 'load:defrost' })
    expect(found.text).toMatch(/climb of 1[12](\.\d+)? mA over the last [45] min; defrost had come on 7 min earlier/)
  })
})

describe('a level that has stood near the trip current for hours', () => {
  it('crept there, though the last hour hardly shows it', () => {
    const slow = (s: number) => (s > 0 ? 24 - (4 * s) / (10 * 3_600) : 24)
    const timeline = logged(slow)
    expect(find({ ...timeline, rcd: { ...timeline.rcd, rampTripMa: 24.4 } }).course).toBe('creep')
  })
})

describe('shares of circuits', () => {
  const circuit = (given: object) => ({
    ...loadOn('1', [[START, START + 12 * HOUR]], START, START + 12 * HOUR),
    of: 'circuit:1',
    kind: 'circuit' as const,
    ...given,
  })

  it('take off what ran on a circuit when it was surveyed', () => {
    const things = [circuit({ changes: [] }), run('a', 8 * 3_600)]
    const test = { id: 's', kind: 'clamp' as const, rcd: 'A', ma: 6, off: ['circuit:1'], at: START + 4 * HOUR }
    const line: BudgetLine = { ...lineOf('circuit:1', 4), basis: 'survey' }
    expect(
      find(
        logged(() => 8, { things, tests: [test] }),
        [line, lineOf('load:a', 1)],
      ).shares,
    ).toEqual([
      { of: 'circuit:1', ma: 3 },
      { of: 'load:a', ma: 1 },
    ])
  })

  it('go by the own clamp where there is one', () => {
    const leakage = seriesOf([AT - 20_000, AT - 10_000, AT], [5, 5.5, 0])
    const things = [circuit({ changes: [], leakage }), run('a', 600)]
    const line: BudgetLine = { ...lineOf('circuit:1', 4), basis: 'channel' }
    expect(
      find(
        logged(() => 8, { things }),
        [line, lineOf('load:a', 1)],
      ).shares[0],
    ).toEqual({ of: 'circuit:1', ma: 4.5 })
  })
})

describe('a trip minutes after the device was closed again', () => {
  it('may be the doing of what came back with the supply', () => {
    const closed = AT - 4 * MINUTE
    const heater = { ...loadOn('defrost', [[closed + 1_000, AT]], START, START + 12 * HOUR), changes: [] }
    const steady = { ...loadOn('sign', [[closed + 1_000, AT]], START, START + 12 * HOUR), changes: [] }
    const bare = logged((s) => (s > 0 && s < 220 ? 10 + (12 * (220 - s)) / 220 : 10), { things: [steady, heater] })
    const energised = spansOf([
      [START, AT - 30 * MINUTE],
      [closed, AT],
    ])
    const lines = [lineOf('load:sign', 0.4), lineOf('load:defrost', 7)]
    expect(find({ ...bare, energised, logged: energised }, lines)).toMatchObject({
      course: 'step',
      trigger: 'load:defrost',
    })
    // Without the closing in between it is not known when it came on.
    expect(find(bare, lines).trigger).toBeNull()
  })
})
