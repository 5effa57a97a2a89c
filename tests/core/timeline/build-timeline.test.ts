import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { buildTimeline } from '../../../core/timeline/build-timeline.ts'
import type { Evidence } from '../../../core/timeline/evidence.ts'
import { WEEKDAYS } from '../../../core/timeline/local-clock.ts'
import { type Series, seriesOf } from '../../../core/timeline/series.ts'
import { complement, intersect, subtract, totalMs, union } from '../../../core/timeline/spans.ts'
import type { Timeline } from '../../../core/timeline/timeline.ts'
import { bakery, D, evidenceOf, M, T0 } from './evidence.ts'

const instant = fc.integer({ min: -36 * 60, max: 60 * 60 }).map((minute) => T0 + minute * M)
const rcd = fc.constantFrom('A', 'A', 'A', 'B', 'Z')
const of = fc.constantFrom(
  'circuit:7',
  'circuit:8',
  'load:mixer',
  'load:proving',
  'load:freezer',
  'load:gone',
  'circuit:1',
)

const trip = fc.oneof(
  fc.tuple(rcd, instant, fc.option(fc.integer({ min: 0, max: 600 }))).map(([device, at, minutes]) => ({
    rcd: device,
    at,
    ...(minutes === null ? {} : { restoredAt: at + minutes * M }),
  })),
  fc
    .tuple(rcd, instant, fc.integer({ min: 1, max: 600 }), fc.option(fc.integer({ min: 0, max: 600 })))
    .map(([device, after, wide, minutes]) => ({
      rcd: device,
      after,
      before: after + wide * M,
      ...(minutes === null ? {} : { restoredAt: after + (wide + minutes) * M }),
    })),
)
const switching = fc.record({ of, at: instant, on: fc.boolean() })
const clockTime = fc.constantFrom('00:00', '02:00', '05:30', '22:15', '24:00')
const timetable = fc.record({
  of,
  onBetween: fc.tuple(clockTime, clockTime),
  days: fc.constant(null).map(() => [...WEEKDAYS]),
})
const withIds = <T extends object>(kind: string, list: readonly T[]): (T & { id: string })[] =>
  list.map((record, i) => ({ ...record, id: `${kind}${i}` }))

/** A log with gaps, dead stretches and flicker: pieces of some length, each of one kind. */
const piece = fc.record({
  readings: fc.integer({ min: 1, max: 60 }),
  skip: fc.constantFrom(0, 0, 0, 30),
  value: fc.constantFrom(9, 9, 0, 1, 230),
})
const log = fc.tuple(fc.array(piece, { maxLength: 12 }), fc.constantFrom(M, 15_000)).map(([pieces, step]): Series => {
  const t: number[] = []
  const v: number[] = []
  let at = T0 - 60 * M
  for (const { readings, skip, value } of pieces) {
    at += skip * step
    for (let i = 0; i < readings; i++) {
      t.push(at)
      v.push(value)
      at += step
    }
  }
  return seriesOf(t, v)
})

const evidence = fc
  .record({
    trips: fc.array(trip, { maxLength: 5 }),
    switchings: fc.array(switching, { maxLength: 6 }),
    timetables: fc.array(timetable, { maxLength: 3 }),
    series: fc.dictionary(
      fc.constantFrom('tails-a', 'tails-b', 'supply-a', 'mixer-runs', 'amps-freezer', 'stray'),
      log,
    ),
  })
  .map(({ trips, switchings, timetables, series }) =>
    evidenceOf({
      trips: withIds('t', trips),
      switchings: withIds('s', switchings),
      timetables: withIds('u', timetables),
      series,
    }),
  )

/** What must be the same: all but the words and the sheet. */
const bare = ({ notes: _notes, sheet: _sheet, ...rest }: Timeline): unknown => rest

const shifted = (value: unknown, ms: number): unknown => {
  if (value instanceof Float64Array) return value.map((t) => (t > 1e12 ? t + ms : t))
  if (typeof value === 'number') return value > 1e12 ? value + ms : value
  if (Array.isArray(value)) return value.map((item) => shifted(item, ms))
  if (value instanceof Map) return new Map([...value].map(([key, item]) => [key, shifted(item, ms)]))
  if (value === null || typeof value !== 'object') return value
  return Object.fromEntries(Object.entries(value).map(([key, item]) => [key, shifted(item, ms)]))
}

describe('buildTimeline on any evidence', () => {
  it('never fails, keeps everything within the span, and has no state that is on and off at once', () => {
    fc.assert(
      fc.property(evidence, (e) => {
        const timeline = buildTimeline(e)
        const outside = (spans: Float64Array): number =>
          totalMs(subtract(spans, complement(spansOfNothing, e.from, e.to)))
        expect(outside(timeline.energised)).toBe(0)
        expect(totalMs(subtract(timeline.logged, timeline.energised))).toBe(0)
        for (const { state, changes } of timeline.things) {
          expect(totalMs(intersect(state.on, state.off))).toBe(0)
          expect(totalMs(subtract(union(state.on, state.off), timeline.energised))).toBe(0)
          for (const [i, c] of changes.entries()) if (i > 0) expect(c.at).toBeGreaterThan(changes[i - 1]!.at)
        }
        for (const t of timeline.trips) expect(t.from >= e.from && t.from <= t.to && t.to <= e.to).toBe(true)
        const ids = timeline.trips.flatMap((t) => t.id ?? [])
        expect(new Set(ids).size).toBe(ids.length)
      }),
      { numRuns: 300 },
    )
  })

  it('does not depend on the order of records', () => {
    fc.assert(
      fc.property(evidence, (e) => {
        const back: Evidence = {
          ...e,
          trips: [...e.trips].reverse(),
          switchings: [...e.switchings].reverse(),
          timetables: [...e.timetables].reverse(),
        }
        expect(buildTimeline(back)).toEqual(buildTimeline(e))
      }),
    )
  })

  it('moves with its times by whole days', () => {
    fc.assert(
      fc.property(evidence, fc.integer({ min: -9, max: 9 }), (e, days) => {
        const moved = shifted(e, days * D) as Evidence
        expect(bare(buildTimeline(moved))).toEqual(shifted(bare(buildTimeline(e)), days * D))
      }),
    )
  })

  it('renames what it says when references are renamed', () => {
    const rename = <T>(value: T): T => JSON.parse(JSON.stringify(value).replaceAll('mixer', 'whisk')) as T
    fc.assert(
      fc.property(evidence, (e) => {
        const series = new Map([...e.series].map(([key, s]) => [key.replace('mixer', 'whisk'), s]))
        const renamed = buildTimeline({ ...rename({ ...e, series: [] }), series })
        const plain = (timeline: Timeline): unknown => ({
          things: timeline.things.map((t) => ({ ...t, label: t.label.toLowerCase().replace('mixer', 'whisk') })),
          energised: timeline.energised,
          trips: timeline.trips,
        })
        const wanted = plain(buildTimeline(e)) as { things: { of: string; ref: string }[] }
        for (const t of wanted.things) {
          t.of = t.of.replace('mixer', 'whisk')
          t.ref = t.ref.replace('mixer', 'whisk')
        }
        expect(plain(renamed)).toEqual(wanted)
      }),
    )
  })
})

describe('buildTimeline on a bare sheet', () => {
  it('needs no circuits, channels or records', () => {
    const timeline = buildTimeline(
      evidenceOf({ sheet: { name: 'x', timeZone: 'UTC', rcds: [{ ref: 'A', ratedMa: 30 }] } }),
    )
    expect(timeline.things).toEqual([])
    expect(timeline.notes).toEqual([])
  })

  it('does not freeze or change what it was given', () => {
    const e = evidenceOf({ sheet: bakery, trips: Object.freeze([{ id: 't', rcd: 'A', at: T0 }]) as Evidence['trips'] })
    const before = JSON.stringify(e)
    buildTimeline(e)
    expect(JSON.stringify(e)).toBe(before)
  })
})

const spansOfNothing = new Float64Array(0)
