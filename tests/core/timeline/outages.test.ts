import { describe, expect, it } from 'vitest'
import { buildTimeline } from '../../../core/timeline/build-timeline.ts'
import { seriesOf } from '../../../core/timeline/series.ts'
import { totalMs } from '../../../core/timeline/spans.ts'
import { bakery, D, evidenceOf, H, hours, levelWithout, logged, M, S, T0 } from './evidence.ts'

const trip = { id: 't1', rcd: 'A' }

describe('outages of a device', () => {
  it('is energised throughout when nothing happened', () => {
    const timeline = buildTimeline(evidenceOf())
    expect(hours(timeline.energised)).toEqual([0, 24])
    expect(timeline.trips).toEqual([])
    expect(timeline.notes).toEqual([])
  })

  it('takes the time from a trip to its restoring away', () => {
    const timeline = buildTimeline(evidenceOf({ trips: [{ ...trip, at: T0 + 2 * H, restoredAt: T0 + 6 * H }] }))
    expect(hours(timeline.energised)).toEqual([0, 2, 6, 24])
    expect(timeline.trips).toMatchObject([{ id: 't1', from: T0 + 2 * H, to: T0 + 2 * H, narrowed: false }])
  })

  it('assumes at most 30 minutes when nobody wrote the restoring, and says so', () => {
    const timeline = buildTimeline(evidenceOf({ trips: [{ ...trip, at: T0 + 2 * H }] }))
    expect(hours(timeline.energised)).toEqual([0, 2, 2.5, 24])
    expect(timeline.notes.join()).toContain('at most 30 minutes')
  })

  it('ends an assumed outage at the next trip: what trips was closed', () => {
    const trips = [
      { ...trip, at: T0 + 2 * H },
      { id: 't2', rcd: 'A', at: T0 + 2 * H + 10 * M, restoredAt: T0 + 3 * H },
    ]
    const timeline = buildTimeline(evidenceOf({ trips }))
    expect(totalMs(timeline.energised)).toBe(23 * H)
    expect(timeline.trips.map((t) => t.id)).toEqual(['t1', 't2'])
  })

  it('ends an outage where the leakage log comes back', () => {
    const series = { 'tails-a': logged(levelWithout(9, [2 * H, 5 * H])) }
    const timeline = buildTimeline(evidenceOf({ series, trips: [{ ...trip, at: T0 + 2 * H }] }))
    expect(hours(timeline.energised)).toEqual([0, 2, 5, 24])
    expect(timeline.trips).toHaveLength(1)
    expect(timeline.notes).toEqual([])
  })

  it('ends an assumed outage where a load runs again', () => {
    const series = { 'mixer-runs': logged((t) => (t >= 2 * H + 12 * M && t < 3 * H ? 1 : 0)) }
    const timeline = buildTimeline(evidenceOf({ series, trips: [{ ...trip, at: T0 + 2 * H }] }))
    expect(hours(timeline.energised)).toEqual([0, 2, 2.2, 24])
  })

  it('is not energised below half of the supply voltage', () => {
    const series = { 'supply-a': logged((t) => (t >= 4 * H && t < 5 * H ? 3 : 231)) }
    const timeline = buildTimeline(evidenceOf({ series }))
    expect(hours(timeline.energised)).toEqual([0, 4, 5, 24])
    expect(timeline.trips).toEqual([])
  })

  it('leaves an outage that began before the span away from it, but not its trip', () => {
    const timeline = buildTimeline(evidenceOf({ trips: [{ ...trip, at: T0 - H, restoredAt: T0 + 3 * H }] }))
    expect(hours(timeline.energised)).toEqual([3, 24])
    expect(timeline.trips).toEqual([])
  })

  it('counts overlapping outages as one and keeps the more exact record', () => {
    const trips = [
      { id: 'a', rcd: 'A', after: T0 + H, before: T0 + 6 * H, restoredAt: T0 + 6 * H },
      { id: 'b', rcd: 'A', at: T0 + 2 * H, restoredAt: T0 + 6 * H, running: ['load:mixer'] },
    ]
    const timeline = buildTimeline(evidenceOf({ trips }))
    expect(hours(timeline.energised)).toEqual([0, 2, 6, 24])
    expect(timeline.trips).toMatchObject([{ id: 'b', running: ['load:mixer'] }])
    expect(timeline.notes.join()).toContain('counted as one')
  })

  it('puts trips of other devices beside, untouched', () => {
    const timeline = buildTimeline(evidenceOf({ trips: [{ id: 'x', rcd: 'B', at: T0 + H, restoredAt: T0 + 2 * H }] }))
    expect(hours(timeline.energised)).toEqual([0, 24])
    expect(timeline.trips).toEqual([])
    expect(timeline.otherTrips).toMatchObject([{ id: 'x', from: T0 + H }])
  })
})

describe('trips in the log', () => {
  const dead = [2 * H, 6.5 * H] as const

  it('narrows an interval to the instant of the fall', () => {
    const series = { 'tails-a': logged(levelWithout(9, dead), 10 * S) }
    const trips = [{ ...trip, after: T0 + H, before: T0 + 6 * H }]
    const timeline = buildTimeline(evidenceOf({ series, trips }))
    expect(timeline.trips).toMatchObject([{ from: T0 + 2 * H, to: T0 + 2 * H, narrowed: true }])
    expect(hours(timeline.energised)).toEqual([0, 2, 6.5, 24])
  })

  it('narrows an interval to two readings where the logger is slow', () => {
    const series = { 'tails-a': logged(levelWithout(9, dead), 15 * M) }
    const trips = [{ ...trip, after: T0 + H, before: T0 + 6 * H, restoredAt: T0 + 6.5 * H }]
    const timeline = buildTimeline(evidenceOf({ series, trips }))
    expect(timeline.trips).toMatchObject([{ from: T0 + 1.75 * H, to: T0 + 2 * H, narrowed: true }])
  })

  it('narrows to the time after the last level when the log falls silent', () => {
    const series = { 'tails-a': logged(() => 9, M, T0, T0 + 3 * H) }
    const trips = [{ ...trip, after: T0 + H, before: T0 + 6 * H, restoredAt: T0 + 6 * H }]
    const { trips: found } = buildTimeline(evidenceOf({ series, trips }))
    expect(found).toMatchObject([{ from: T0 + 3 * H - M, to: T0 + 6 * H, narrowed: true }])
  })

  it('leaves an interval alone when the log goes on', () => {
    const series = { 'tails-a': logged(() => 9) }
    const trips = [{ ...trip, after: T0 + H, before: T0 + 6 * H, restoredAt: T0 + 6 * H }]
    const timeline = buildTimeline(evidenceOf({ series, trips }))
    expect(timeline.trips).toMatchObject([{ from: T0 + H, to: T0 + 6 * H, narrowed: false }])
    expect(hours(timeline.energised)).toEqual([0, 24])
  })

  it('takes the moment a load stops between the last level and the first nothing', () => {
    const series = {
      'tails-a': logged(levelWithout(9, dead), M),
      'mixer-runs': logged((t) => (t >= H && t < 2 * H - 20 * S ? 1 : 0), 10 * S),
    }
    const timeline = buildTimeline(evidenceOf({ series, trips: [{ ...trip, after: T0 + H, before: T0 + 6 * H }] }))
    expect(timeline.trips[0]!.from).toBe(T0 + 2 * H - 20 * S)
    expect(timeline.things[1]!.changes).toEqual([{ at: T0 + H, on: true }])
  })

  it('keeps a device that opens again before the log saw a level as two trips', () => {
    // Closed at 06:00:20, open again at 06:00:40: at one reading a minute the log never sees it closed.
    const series = { 'tails-a': logged(levelWithout(9, [2 * H, 9 * H])) }
    const again = T0 + 6 * H + 40 * S
    const trips = [
      { id: 'a', rcd: 'A', after: T0 + H, before: T0 + 6 * H, restoredAt: T0 + 6 * H + 20 * S },
      { id: 'b', rcd: 'A', at: again, restoredAt: T0 + 9 * H },
    ]
    const timeline = buildTimeline(evidenceOf({ series, trips }))
    expect(timeline.trips.map((t) => [t.id, t.from - T0])).toEqual([
      ['a', 2 * H],
      ['b', again - T0],
    ])
    expect([...timeline.energised].map((t) => t - T0)).toEqual([0, 2 * H, 6 * H + 20 * S, 6 * H + 40 * S, 9 * H, D])
  })

  it('narrows an interval to its beginning when the log is dead from there on', () => {
    const series = { 'tails-a': logged(levelWithout(9, [2 * H, 9 * H])) }
    const trips = [
      { id: 'a', rcd: 'A', at: T0 + 2 * H, restoredAt: T0 + 3 * H + 20 * S },
      { id: 'b', rcd: 'A', after: T0 + 3 * H + 20 * S, before: T0 + 8.99 * H, restoredAt: T0 + 9 * H },
    ]
    const timeline = buildTimeline(evidenceOf({ series, trips }))
    expect(timeline.trips[1]).toMatchObject({ id: 'b', from: T0 + 3 * H + M, to: T0 + 3 * H + M, narrowed: true })
  })

  it('moves a written time to the fall a few minutes away', () => {
    const series = { 'tails-a': logged(levelWithout(9, dead), 10 * S) }
    const timeline = buildTimeline(evidenceOf({ series, trips: [{ ...trip, at: T0 + 2 * H + 3 * M }] }))
    expect(timeline.trips).toMatchObject([{ id: 't1', from: T0 + 2 * H, narrowed: false }])
    expect(timeline.notes.join()).toContain("log's time is taken")
  })

  it('proposes a trip that nobody wrote down', () => {
    const series = { 'tails-a': logged(levelWithout(9, dead)) }
    const timeline = buildTimeline(evidenceOf({ series }))
    expect(timeline.trips).toMatchObject([{ id: null, from: T0 + 2 * H, restoredAt: T0 + 6.5 * H }])
    expect(hours(timeline.energised)).toEqual([0, 2, 6.5, 24])
    expect(timeline.notes.join()).toContain('proposed')
  })

  it.each([
    ['a slow fall', (t: number): number => (t < 2 * H ? 9 : t < 3 * H ? 9 * (3 - t / H) : t < 6 * H ? 0.02 : 9)],
    ['a moment', (t: number): number => (t >= 2 * H && t < 2 * H + M ? 0.02 : 9)],
    ['a fall that never comes back', (t: number): number => (t >= 20 * H ? 0.02 : 9)],
    ['a level that was low anyway', (t: number): number => (t >= 2 * H && t < 6 * H ? 0.02 : 0.15)],
  ])('does not propose %s', (_, level) => {
    expect(buildTimeline(evidenceOf({ series: { 'tails-a': logged(level) } })).trips).toEqual([])
  })

  it('does not propose a gap, nor a fall behind one', () => {
    const before = logged(() => 9, M, T0, T0 + 2 * H)
    const after = logged((t) => (t < 6 * H ? 0.02 : 9), M, T0 + 5 * H)
    const join = (a: Float64Array, b: Float64Array): number[] => [...a, ...b]
    const series = { 'tails-a': seriesOf(join(before.t, after.t), join(before.v, after.v)) }
    const timeline = buildTimeline(evidenceOf({ series }))
    expect(timeline.trips).toEqual([])
    // Dead behind the gap: no trip is claimed, but no supply is either.
    expect(hours(timeline.energised)).toEqual([0, 5, 6, 24])
    const silent = {
      'tails-a': seriesOf(
        join(
          before.t,
          before.t.map((t) => t + 10 * H),
        ),
        join(before.v, before.v),
      ),
    }
    expect(hours(buildTimeline(evidenceOf({ series: silent })).energised)).toEqual([0, 24])
  })

  it('does not propose what switching by hand explains, and stays energised', () => {
    const series = { 'tails-a': logged(levelWithout(9, dead)) }
    const switchings = [{ id: 's', of: 'circuit:7', at: T0 + 2 * H + 4 * M, on: false }]
    const timeline = buildTimeline(evidenceOf({ series, switchings }))
    expect(timeline.trips).toEqual([])
    expect(hours(timeline.energised)).toEqual([0, 24])
  })

  it('does not propose the habit of one load that carries the whole level', () => {
    const on = (t: number): boolean => t % (6 * H) < 5 * H
    const series = {
      'tails-a': logged((t) => (on(t) ? 9 : 0.02)),
      'proving-runs': logged((t) => (on(t) ? 1 : 0)),
    }
    expect(buildTimeline(evidenceOf({ series })).trips).toEqual([])
  })

  it('does not propose a trip while a load of the device runs: the clamp was off', () => {
    const series = { 'tails-a': logged(levelWithout(9, dead)), 'mixer-runs': logged(() => 1) }
    const timeline = buildTimeline(evidenceOf({ series }))
    expect(timeline.trips).toEqual([])
    expect(hours(timeline.energised)).toEqual([0, 24])
    expect(totalMs(timeline.logged)).toBe(D - 4.5 * H)
    expect(timeline.notes.join()).toContain('the clamp was off')
  })

  it('takes what two devices lose together as an outage of the supply', () => {
    const level = logged(levelWithout(9, dead))
    const timeline = buildTimeline(evidenceOf({ series: { 'tails-a': level, 'tails-b': level } }))
    expect(timeline.trips).toEqual([])
    expect(hours(timeline.energised)).toEqual([0, 2, 6.5, 24])
    expect(timeline.notes.join()).toContain('together')
  })

  it('proposes the next fall when the device opened again after it was closed', () => {
    const series = { 'tails-a': logged(levelWithout(9, [2 * H, 4 * H], [4.1 * H, 6 * H])) }
    const trips = [{ ...trip, at: T0 + 2 * H, restoredAt: T0 + 6 * H }]
    expect(buildTimeline(evidenceOf({ series, trips })).trips.map((t) => t.id)).toEqual(['t1', null])
  })

  it('sets readings after the clamp came off aside when trips go on', () => {
    const series = { 'tails-a': logged(levelWithout(9, [20 * H, 30 * H])) }
    const trips = [{ ...trip, at: T0 + 22 * H, restoredAt: T0 + 23 * H }]
    const timeline = buildTimeline(evidenceOf({ series, trips }))
    expect(hours(timeline.energised)).toEqual([0, 22, 23, 24])
    expect(timeline.leakage!.t.at(-1)).toBe(T0 + 20 * H - M)
  })
})

describe('leakage of a device', () => {
  it('adds conductive and capacitive parts as phasors', () => {
    const channels = [
      { ref: 'g', quantity: 'leakage' as const, rcd: 'A', reading: 'conductive' as const },
      { ref: 'b', quantity: 'leakage' as const, rcd: 'A', reading: 'capacitive' as const },
      { ref: 'dc', quantity: 'leakage' as const, rcd: 'A', reading: 'dc' as const },
    ]
    const series = { g: logged(() => 5), b: logged(() => 12, M, T0 + 20 * S), dc: logged(() => 40) }
    const timeline = buildTimeline(evidenceOf({ sheet: { ...bakery, channels }, series }))
    // domain.md: 5 mA conductive on 12 mA capacitive reads 13 mA.
    expect(new Set(timeline.leakage!.v)).toEqual(new Set([13]))
  })

  it('has none without readings, and none of one part alone', () => {
    expect(buildTimeline(evidenceOf()).leakage).toBeNull()
    const channels = [{ ref: 'g', quantity: 'leakage' as const, rcd: 'A', reading: 'conductive' as const }]
    const timeline = buildTimeline(evidenceOf({ sheet: { ...bakery, channels }, series: { g: logged(() => 5) } }))
    expect(timeline.leakage).toBeNull()
    expect(timeline.notes.join()).toContain('conductive')
  })
})
