import { describe, expect, it } from 'vitest'
import { buildTimeline } from '../../../core/timeline/build-timeline.ts'
import type { Evidence } from '../../../core/timeline/evidence.ts'
import { exposureOfLoadCurrent, twoLevels } from '../../../core/timeline/load-current.ts'
import { exposureOfRunning, sendsOnlyChanges } from '../../../core/timeline/running.ts'
import { gaps, loggedSpans, seriesOf } from '../../../core/timeline/series.ts'
import type { Thing } from '../../../core/timeline/timeline.ts'
import { bakery, D, evidenceOf, H, hours, logged, M, T0 } from './evidence.ts'

const thing = (evidence: Evidence, of: string): Thing => buildTimeline(evidence).things.find((t) => t.of === of)!

/** Deterministic noise in [-1, 1): a Weyl sequence. */
const noise = (t: number): number => 2 * (((t / M) * 0.618_033_988_75) % 1) - 1

describe('gaps and logged time', () => {
  const series = seriesOf([0, 10, 20, 30, 100, 110], [1, 1, 1, 1, 1, 1])

  it('are complementary but for one usual interval after each stretch', () => {
    expect([...gaps(series)]).toEqual([30, 100])
    expect([...loggedSpans(series)]).toEqual([0, 40, 100, 120])
    expect([...loggedSpans(series, 30, 0)]).toEqual([0, 30, 100, 110])
  })

  it('are nothing for no or one reading', () => {
    expect([...gaps(seriesOf([5], [1]))]).toEqual([])
    expect([...loggedSpans(seriesOf([5], [1]))]).toEqual([])
    expect([...loggedSpans(seriesOf([], []))]).toEqual([])
  })
})

describe('exposureOfRunning', () => {
  it('holds a reading until the next one, and is unknown in a gap', () => {
    const e = exposureOfRunning(seriesOf([0, 10, 20, 30, 40, 90, 100], [0, 0, 1, 1, 0, 1, 1]))
    expect([...e.on]).toEqual([20, 40, 90, 110])
    expect([...e.off]).toEqual([0, 20, 40, 50])
  })

  it('understands a logger that sends only changes', () => {
    const t = [1, 1.2, 5, 5.1, 9, 13, 13.3, 14, 14.1, 20, 20.2].map((h) => T0 + h * H)
    const series = seriesOf(t, [1, 0, 1, 0, 1, 0, 1, 0, 1, 0, 1])
    expect(sendsOnlyChanges(series)).toBe(true)
    const e = exposureOfRunning(series)
    expect(hours(e.on)).toEqual(
      [1, 1.2, 5, 5.1, 9, 13, 13.3, 14, 14.1, 20, 20.2, 44.2].map((h) => expect.closeTo(h, 9)),
    )
    expect(e.on.length + e.off.length).toBe(2 * t.length)
  })

  it('holds such a change for a day at most', () => {
    const e = exposureOfRunning(seriesOf([T0, T0 + 3 * D], [1, 0]))
    expect(hours(e.on)).toEqual([0, 24])
    expect(hours(e.off)).toEqual([72, 96])
  })

  it('knows nothing from a single reading', () => {
    expect(exposureOfRunning(seriesOf([T0], [1])).on).toHaveLength(0)
  })

  it('does not take a regular logger for one that sends only changes', () => {
    expect(sendsOnlyChanges(logged((t) => (t / M) % 2))).toBe(false)
    expect(sendsOnlyChanges(logged(() => 1))).toBe(false)
  })
})

describe('exposureOfLoadCurrent', () => {
  it('splits off from on between the two levels, with hysteresis', () => {
    const series = logged((t) => (t >= 6 * H && t < 9 * H ? 8 + noise(t) : 0.05 + 0.02 * noise(t)))
    expect(hours(exposureOfLoadCurrent(series)!.on)).toEqual([6, 9])
    const dip = logged((t) => (t >= 6 * H && t < 9 * H ? (t === 7 * H ? 2.5 : 8) : 0))
    expect(hours(exposureOfLoadCurrent(dip)!.on)).toEqual([6, 9])
  })

  it('finds a load that runs one hundredth of the time', () => {
    const levels = twoLevels(logged((t) => (t % (4 * H) < 2 * M ? 9 : 0.1)))
    expect(levels).toEqual({ low: 0.1, high: 9 })
  })

  it.each([
    ['one level with noise', (t: number): number => 3 + noise(t)],
    ['nothing at all', (): number => 0],
    ['a last digit that flickers', (t: number): number => ((t / M) % 2 === 0 ? 0 : 0.01)],
    ['an even spread', (t: number): number => 5 + 5 * noise(t)],
    ['two levels of something always on', (t: number): number => ((t / H) % 2 < 1 ? 8 : 10)],
  ])('does not find two levels in %s', (_, value) => {
    expect(exposureOfLoadCurrent(logged(value))).toBeNull()
  })
})

describe('states of circuits and loads', () => {
  it('lists circuits in the order of the sheet, each followed by its loads', () => {
    const { things } = buildTimeline(evidenceOf())
    expect(things.map((t) => [t.of, t.source, t.isolation])).toEqual([
      ['circuit:7', 'assumed', 'single-pole'],
      ['load:mixer', 'assumed', 'two-pole'],
      ['load:proving', 'assumed', 'two-pole'],
      ['circuit:8', 'assumed', 'two-pole'],
      ['load:freezer', 'assumed', 'two-pole'],
    ])
    expect(things.map((t) => t.label)).toEqual(['Bakehouse sockets', 'Mixer', 'proving', 'circuit 8', 'freezer'])
    expect(hours(things[0]!.state.on)).toEqual([0, 24])
    // Of a load without any record nothing is known: unknown is never off.
    expect([things[1]!.state.on.length, things[1]!.state.off.length]).toEqual([0, 0])
  })

  it('has a circuit on until a switching says otherwise', () => {
    const switchings = [
      { id: 'b', of: 'circuit:7', at: T0 + 8 * H, on: true },
      { id: 'a', of: 'circuit:7', at: T0 + 5 * H, on: false },
    ]
    const { state, changes, source } = thing(evidenceOf({ switchings }), 'circuit:7')
    expect([hours(state.on), hours(state.off), source]).toEqual([[0, 5, 8, 24], [5, 8], 'switching'])
    expect(changes).toEqual([
      { at: T0 + 5 * H, on: false },
      { at: T0 + 8 * H, on: true },
    ])
  })

  it('knows the state at the beginning from earlier switchings', () => {
    const switchings = [{ id: 'a', of: 'circuit:7', at: T0 - 5 * D, on: false }]
    expect(hours(thing(evidenceOf({ switchings }), 'circuit:7').state.off)).toEqual([0, 24])
  })

  it('has a load off whose circuit is off, whatever its own source', () => {
    const switchings = [{ id: 'a', of: 'circuit:7', at: T0 + 5 * H, on: false }]
    const mixer = thing(evidenceOf({ switchings, series: { 'mixer-runs': logged(() => 1) } }), 'load:mixer')
    expect([hours(mixer.state.on), hours(mixer.state.off), mixer.source]).toEqual([[0, 5], [5, 24], 'running'])
    expect(hours(thing(evidenceOf({ switchings }), 'load:proving').state.off)).toEqual([5, 24])
  })

  it('prefers running, then load current, then switchings, then timetables', () => {
    const switchings = [{ id: 's', of: 'load:freezer', at: T0 + H, on: true }]
    const timetables = [
      { id: 't', of: 'load:freezer', onBetween: ['02:00', '05:00'] as [string, string], days: ['mon' as const] },
    ]
    const amps = logged((t) => (t >= 6 * H && t < 9 * H ? 5 : 0))
    expect(thing(evidenceOf({ switchings, timetables, series: { 'amps-freezer': amps } }), 'load:freezer').source).toBe(
      'load-current',
    )
    const flat = thing(
      evidenceOf({ switchings, timetables, series: { 'amps-freezer': logged(() => 3) } }),
      'load:freezer',
    )
    expect(flat.source).toBe('switching')
    // Before its first switching the timetable speaks.
    expect([hours(flat.state.on), hours(flat.state.off)]).toEqual([
      [1, 24],
      [0, 1],
    ])
    expect(thing(evidenceOf({ timetables }), 'load:freezer').source).toBe('timetable')
  })

  it('honours days, validity and windows past midnight of timetables', () => {
    // T0 is a Monday; the Sunday window of the night before reaches into it.
    const nightly = { of: 'load:freezer', onBetween: ['22:00', '06:00'] as [string, string], days: ['sun' as const] }
    const sunday = thing(evidenceOf({ timetables: [{ id: 't', ...nightly }] }), 'load:freezer')
    expect([hours(sunday.state.on), hours(sunday.state.off)]).toEqual([
      [0, 6],
      [6, 24],
    ])
    const bounded = [{ id: 't', ...nightly, days: ['mon' as const], from: T0 + 12 * H, until: T0 + 23 * H }]
    const monday = thing(evidenceOf({ timetables: bounded }), 'load:freezer')
    expect([hours(monday.state.on), hours(monday.state.off)]).toEqual([
      [22, 23],
      [12, 22],
    ])
  })

  it('has a load unplugged by hand off where its channel is silent', () => {
    const switchings = [{ id: 's', of: 'load:mixer', at: T0 + 6 * H, on: false }]
    const series = { 'mixer-runs': logged((t) => (t < 3 * H ? 1 : 0), M, T0, T0 + 6 * H) }
    const { state } = thing(evidenceOf({ switchings, series }), 'load:mixer')
    expect([hours(state.on), hours(state.off)]).toEqual([
      [0, 3],
      [3, 24],
    ])
  })

  it("does not count the device's own opening and closing as changes", () => {
    const trips = [{ id: 't', rcd: 'A', at: T0 + 4 * H, restoredAt: T0 + 6 * H }]
    const runs = (t: number): number => (t < 4 * H || t >= 6 * H + 40_000 ? 1 : 0)
    const regular = thing(evidenceOf({ trips, series: { 'mixer-runs': logged(runs, 10_000) } }), 'load:mixer')
    expect(regular.changes).toEqual([])
    const changes = seriesOf([T0, T0 + 4 * H, T0 + 6 * H + 40_000], [1, 0, 1])
    const onlyChanges = thing(evidenceOf({ trips, series: { 'mixer-runs': changes } }), 'load:mixer')
    expect(onlyChanges.changes).toEqual([])
    expect(hours(onlyChanges.state.on)[0]).toBe(0)
  })

  it('sets records of what is not on the sheet aside, with a note', () => {
    const timeline = buildTimeline(
      evidenceOf({
        switchings: [{ id: 's', of: 'load:gone', at: T0, on: true }],
        trips: [{ id: 't', rcd: 'Z', at: T0 + H }],
        timetables: [{ id: 'u', of: 'circuit:gone', onBetween: ['02:00', '05:00'], days: ['mon'] }],
        remedies: [{ id: 'r', of: 'load:gone', at: T0, done: 'unplugged' }],
        tests: [{ id: 'c', kind: 'ramp', rcd: 'Z', tripMa: 22, at: T0 }],
      }),
    )
    expect(timeline.notes).toHaveLength(5)
    expect([timeline.trips, timeline.otherTrips, timeline.tests, timeline.remedies]).toEqual([[], [], [], []])
  })

  it('gives each thing its own leakage, and gaps of every channel', () => {
    const channels = [...bakery.channels!, { ref: 'leak-8', quantity: 'leakage' as const, circuit: '8' }]
    const series = { 'leak-8': logged(() => 2, M, T0 + H, T0 + 5 * H) }
    const timeline = buildTimeline(evidenceOf({ sheet: { ...bakery, channels }, series }))
    expect(timeline.things.find((t) => t.of === 'circuit:8')!.leakage!.t).toHaveLength(240)
    expect(timeline.gaps.map((g) => [g.channel, (g.from - T0) / H, (g.to - T0) / H])).toEqual([
      ['leak-8', 0, 1],
      ['leak-8', 5 - 1 / 60, 24],
    ])
  })

  it('refuses a device that is not on the sheet and a span without time', () => {
    expect(() => buildTimeline(evidenceOf({ rcd: 'Z' }))).toThrow(
      expect.objectContaining({ code: 'unknown_reference' }),
    )
    expect(() => buildTimeline(evidenceOf({ to: T0 }))).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})
