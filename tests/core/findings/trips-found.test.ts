import { describe, expect, it } from 'vitest'
import { headroom } from '../../../core/findings/headroom.ts'
import { preferences } from '../../../core/findings/preference.ts'
import { tripFindings } from '../../../core/findings/trips.ts'
import type { Frame } from '../../../core/findings/windows/trip-share.ts'
import { windowOf } from '../../../core/findings/windows/trip-share.ts'
import { buildTimeline } from '../../../core/timeline/build-timeline.ts'
import { spansOf } from '../../../core/timeline/spans.ts'
import { bakery, evidenceOf, H, levelWithout, logged, M, S, T0 } from '../timeline/evidence.ts'

const trip = { id: 't1', rcd: 'A' }
const dead = [2 * H, 6.5 * H] as const
type Parts = Parameters<typeof evidenceOf>[0]

const foundIn = (parts: Parts) => {
  const timeline = buildTimeline(evidenceOf(parts))
  return { timeline, trips: tripFindings(timeline, [], headroom(timeline)) }
}

describe('trips shared over several devices', () => {
  it('are so when both were written down within a minute, and name the device', () => {
    const at = T0 + 2 * H
    const { trips } = foundIn({
      sheet: { ...bakery, rcds: [bakery.rcds![0]!, { ...bakery.rcds![1]!, label: 'Shop' }] },
      trips: [
        { ...trip, at, restoredAt: at + H },
        { id: 't2', rcd: 'B', at: at + 30 * S, restoredAt: at + H },
      ],
    })
    expect(trips).toHaveLength(1)
    expect(trips[0]).toMatchObject({ course: 'shared', trigger: null, text: 'Device Shop opened at the same time.' })
  })

  it('are so when only the log of the other device shows it', () => {
    const level = logged(levelWithout(9, dead), 10 * S)
    const written = [{ ...trip, at: T0 + 2 * H, restoredAt: T0 + 6.5 * H }]
    const { timeline, trips } = foundIn({ series: { 'tails-a': level, 'tails-b': level }, trips: written })
    expect(timeline.otherTrips).toMatchObject([{ id: null, rcd: 'B', from: T0 + 2 * H }])
    expect(trips[0]!.course).toBe('shared')
    // once the fall of the other device is written down it is one trip, not two
    const both = foundIn({
      series: { 'tails-a': level, 'tails-b': level },
      trips: [...written, { id: 't2', rcd: 'B', at: T0 + 2 * H, restoredAt: T0 + 6.5 * H }],
    })
    expect(both.timeline.otherTrips.map((t) => t.id)).toEqual(['t2'])
  })

  it('are not so when the other device was switched off by hand', () => {
    const level = logged(levelWithout(9, dead), 10 * S)
    const { timeline, trips } = foundIn({
      series: { 'tails-a': level, 'tails-b': level },
      trips: [{ ...trip, at: T0 + 2 * H, restoredAt: T0 + 6.5 * H }],
      switchings: [{ id: 's', of: 'circuit:1', at: T0 + 2 * H, on: false }],
    })
    expect(timeline.otherTrips).toEqual([])
    expect(trips[0]!.course).not.toBe('shared')
  })

  it('are not so by the habit of a load that carries the whole level of the other device', () => {
    const cycling = logged((t) => (t % (2 * H) < 1.5 * H ? 9 : 0.02), 10 * S)
    const { timeline, trips } = foundIn({
      series: { 'tails-a': logged(levelWithout(9, [1.5 * H, 3 * H]), 10 * S), 'tails-b': cycling },
      trips: [{ ...trip, at: T0 + 1.5 * H, restoredAt: T0 + 3 * H }],
    })
    expect(timeline.otherTrips).toEqual([])
    expect(trips[0]!.course).not.toBe('shared')
  })

  it('may come with a voltage event', () => {
    const volts = logged((t) => (t >= 2 * H - 4 * S && t < 2 * H ? 170 : t >= 2 * H && t < 2.5 * H ? 0 : 231), S)
    const { trips } = foundIn({
      series: { 'supply-a': volts, 'tails-a': logged(levelWithout(9, [2 * H, 2.5 * H]), S) },
      trips: [{ ...trip, at: T0 + 2 * H, restoredAt: T0 + 2.5 * H }],
    })
    expect(trips[0]).toMatchObject({ course: 'shared' })
    expect(trips[0]!.text).toMatch(/the voltage left its band just before/)
  })
})

describe('trips that the log tells', () => {
  it('are proposed without an id, and say so', () => {
    const { trips } = foundIn({ series: { 'tails-a': logged(levelWithout(9, dead), 10 * S) } })
    expect(trips).toMatchObject([{ id: null, at: '2026-09-21T02:00:00Z', course: 'sudden' }])
    expect(trips[0]!.text).toMatch(/^Nobody wrote this trip down: the log falls to nothing and comes back; 9 mA before/)
  })

  it('get their moment where only an interval was written down', () => {
    const { trips } = foundIn({
      series: { 'tails-a': logged(levelWithout(9, dead), 10 * S) },
      trips: [{ ...trip, after: T0 + H, before: T0 + 6 * H }],
    })
    expect(trips).toMatchObject([{ id: 't1', at: '2026-09-21T02:00:00Z', after: null, before: null, course: 'sudden' }])
    expect(trips[0]!.text).toMatch(/^Found later; the log shows when it came; 9 mA before/)
  })

  it('stay a narrower interval with a slow logger, and all of it without a log', () => {
    const slow = foundIn({
      series: { 'tails-a': logged(levelWithout(9, dead), 15 * M) },
      trips: [{ ...trip, after: T0 + H, before: T0 + 6 * H, restoredAt: T0 + 6.5 * H }],
    }).trips
    expect(slow).toMatchObject([{ at: null, after: '2026-09-21T01:45:00Z', before: '2026-09-21T02:00:00Z' }])
    expect(slow[0]!.text).toMatch(/the log narrows when it came/)
    const none = foundIn({ trips: [{ ...trip, after: T0 + H, before: T0 + 6 * H, restoredAt: T0 + 6.5 * H }] }).trips
    expect(none).toMatchObject([{ at: null, after: '2026-09-21T01:00:00Z', before: '2026-09-21T06:00:00Z' }])
  })

  it('left as an interval counts spread over it, never bolder than what it shows', () => {
    const { timeline, trips } = foundIn({
      series: { 'tails-a': logged(() => 9) },
      trips: [{ ...trip, after: T0 + H, before: T0 + 5 * H, restoredAt: T0 + 5 * H }],
    })
    expect(trips[0]!.text).toMatch(/somewhere in 4 hours.*counts spread over that time/i)
    const even = { prior: 1, logDensity: 0, hoursOf: (s: Float64Array) => measure(s), at: () => 1 }
    const frame: Frame = {
      timeline,
      hours: 24,
      trips: timeline.trips,
      habits: [even],
      kicks: spansOf([]),
      high: spansOf([]),
    }
    const all = spansOf([[T0, T0 + 24 * H]])
    const window = windowOf(frame, 'on', 'while it ran', 1, spansOf([[T0 + 2 * H, T0 + 3 * H]]), all)!
    const [found] = preferences(frame, [{ of: 'load:mixer', window, family: [window] }])
    // one of the four hours of the interval; alone it proves nothing
    expect(found).toMatchObject({ inside: 0.25, p: 1 })
    expect(found!.byHour).toMatchObject({ inside: 0.25, p: 1 })
    // exposed 02-03 h on the only day: at that hour of the day it always runs
    expect(found!.byHour!.expected).toBeCloseTo(0.25, 9)
  })
})

function measure(spans: Float64Array): number {
  let sum = 0
  for (let i = 0; i < spans.length; i += 2) sum += spans[i + 1]! - spans[i]!
  return sum / H
}
