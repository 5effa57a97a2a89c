import { describe, expect, it } from 'vitest'
import { clockWindows } from '../../../../core/findings/windows/clock-windows.ts'
import { habitsOf } from '../../../../core/findings/windows/habits.ts'
import { type HeldThing, heldToTrips } from '../../../../core/findings/windows/held-to-trips.ts'
import { kicksOf } from '../../../../core/findings/windows/kicks.ts'
import { periodWindows } from '../../../../core/findings/windows/period-windows.ts'
import { sunWindows } from '../../../../core/findings/windows/sun-windows.ts'
import { thingWindows } from '../../../../core/findings/windows/thing-windows.ts'
import type { Frame } from '../../../../core/findings/windows/trip-share.ts'
import { antecedent, dryings, rainWindows } from '../../../../core/findings/windows/weather-windows.ts'
import { spansOf } from '../../../../core/timeline/spans.ts'
import { sunTimes } from '../../../../core/timeline/sun.ts'
import type { Thing, Timeline } from '../../../../core/timeline/timeline.ts'
import { HOUR, loadOn, MINUTE, START, timelineOf, tripAt } from '../timeline-of.ts'

const frameOf = (timeline: Timeline): Frame => ({
  timeline,
  hours: (timeline.to - timeline.from) / HOUR,
  trips: timeline.trips.map(({ from, to }) => ({ from, to })),
  habits: habitsOf(timeline, timeline.trips),
  kicks: kicksOf(timeline),
  high: spansOf([]),
})
const seen = (thing: Thing): HeldThing => ({ thing, blind: null })
const inside = (windows: readonly { key: string; inside: Float64Array }[], key: string): number[] => [
  ...windows.find((w) => w.key === key)!.inside,
]

describe('thingWindows', () => {
  const day = 24 * HOUR
  const runs = [0, 1, 2, 3].map((d) => [START + d * day + 6 * HOUR, START + d * day + 8 * HOUR] as const)
  const oven = loadOn('oven', runs, START, START + 4 * day)

  it('measures exposed hours and which trips fell inside', () => {
    const trips = [
      tripAt(START + 6 * HOUR + 2 * MINUTE),
      tripAt(START + day + 7.5 * HOUR),
      tripAt(START + 2 * day + 12 * HOUR),
    ]
    const windows = thingWindows(frameOf(timelineOf({ days: 4, things: [oven], trips })), seen(oven))
    const on = windows.find((w) => w.key === 'on')!
    expect(on.insideHours).toBeCloseTo(8, 10)
    expect([...on.inside]).toEqual([1, 1, 0])
    expect(inside(windows, 'after-on-3')).toEqual([1, 0, 0])
    expect(inside(windows, 'late-60')).toEqual([0, 1, 0])
    expect(windows.reduce((sum, w) => sum + w.prior, 0)).toBeCloseTo(1, 12)
  })

  it('spreads a trip known as an interval over it', () => {
    const trips = [tripAt(START + 5 * HOUR, START + 7 * HOUR)]
    const windows = thingWindows(frameOf(timelineOf({ days: 4, things: [oven], trips })), seen(oven))
    expect(inside(windows, 'on')[0]).toBeCloseTo(0.5, 10)
  })

  it('counts the moment of the trip itself as inside, though supply ends there', () => {
    const trips = [tripAt(START + 8 * HOUR)]
    expect(inside(thingWindows(frameOf(timelineOf({ days: 4, trips })), seen(oven)), 'on')).toEqual([1])
  })

  it('has no window for what never changed', () => {
    const always = loadOn('freezer', [[START, START + 4 * day]], START, START + 4 * day)
    expect(thingWindows(frameOf(timelineOf({ days: 4, trips: [tripAt(START + HOUR)] })), seen(always))).toEqual([])
  })

  it('takes unknown time in the proportion of the known', () => {
    const half = { ...oven, state: { on: oven.state.on.slice(0, 4), off: oven.state.off.slice(0, 4) } }
    const trips = [tripAt(START + 3.9 * day)]
    const on = thingWindows(frameOf(timelineOf({ days: 4, trips })), seen(half)).find((w) => w.key === 'on')!
    expect(on.inside[0]).toBeGreaterThan(0.05)
    expect(on.inside[0]).toBeLessThan(0.15)
  })
})

describe('graded exposures', () => {
  const day = 24 * HOUR
  const runs = [0, 1, 2, 3].map((d) => [START + d * day + 6 * HOUR, START + d * day + 8 * HOUR] as const)
  const oven = loadOn('oven', runs, START, START + 4 * day)

  it('weighs the minutes after a start as many times as it says, in hours and at trips alike', () => {
    const trips = [tripAt(START + 6 * HOUR + MINUTE), tripAt(START + day + 7 * HOUR)]
    const mostly = thingWindows(frameOf(timelineOf({ days: 4, things: [oven], trips })), seen(oven)).find(
      (w) => w.key === 'on-8x3',
    )!
    // four runs of two hours, three minutes of each eight times: 8 h + 7 × 12 min
    expect(mostly.hoursBy[0]).toBeCloseTo(8 + (7 * 12) / 60, 10)
    expect([...mostly.weightsBy[0]!]).toEqual([8, 1])
    expect([...mostly.inside]).toEqual([1, 1])
    expect(mostly.insideHours).toBeCloseTo(8, 10)
  })

  it("holds other things' starts within its runs for last steps", () => {
    const kettle = loadOn('kettle', [[START + 7 * HOUR, START + 7.1 * HOUR]], START, START + 4 * day)
    const trips = [tripAt(START + 7 * HOUR + 0.5 * MINUTE), tripAt(START + 7.5 * HOUR)]
    const frame = frameOf(timelineOf({ days: 4, things: [oven, kettle], trips }))
    const kicked = thingWindows(frame, seen(oven)).find((w) => w.key === 'on-kick-8')!
    expect([...kicked.weightsBy[0]!]).toEqual([8, 1])
  })

  it('takes a start that nobody read before the trip as likely as chance has it, under every habit', () => {
    const slow = { ...oven, readEveryMs: MINUTE }
    const trips = [tripAt(START + 12 * HOUR)]
    const frame = frameOf(timelineOf({ days: 4, things: [slow], trips }))
    const held = heldToTrips(slow, frame.trips)
    expect([...held.blind!.unread]).toEqual([1])
    const first = thingWindows(frame, held).find((w) => w.key === 'after-on-1')!
    // weight over exposed share is 1: such a trip speaks neither for nor against
    first.hoursBy.forEach((hours, k) => {
      expect((first.weightsBy[k]![0]! * frame.hours) / hours).toBeCloseTo(1, 10)
    })
    // that it has run for long by then is against what was read
    expect(thingWindows(frame, held).find((w) => w.key === 'late-60')!.weightsBy[0]![0]).toBe(0)
  })
})

describe('habits', () => {
  it('keep the length of all time, and say which day the trips keep', () => {
    const noon = [1, 2, 3, 4].map((d) => tripAt(START + d * 24 * HOUR + 12 * HOUR))
    const timeline = timelineOf({ days: 7, trips: noon })
    const [flat, ...others] = habitsOf(timeline, noon)
    expect(flat!.logDensity).toBe(0)
    for (const habit of others) expect(habit.hoursOf(timeline.energised)).toBeCloseTo(168, 8)
    expect([flat!, ...others].reduce((sum, habit) => sum + habit.prior, 0)).toBeCloseTo(1, 12)
    const best = others.reduce((a, b) => (b.logDensity > a.logDensity ? b : a))
    expect(best.at(12 * 60)).toBeGreaterThan(1)
    expect(best.at(3 * 60)).toBeLessThan(1)
    // ten hours, and fourteen of a twentieth of their liveliness: 24 / (10 + 14 / 20)
    expect(best.logDensity).toBeCloseTo(4 * Math.log(24 / 10.7), 8)
  })
})

describe('clockWindows', () => {
  it('holds trips at one local time in both halves of a span with a change of the hour', () => {
    // Summer time ended in Vienna on 2026-10-25 at 03:00 local: 02:10 local is 00:10 UTC before and 01:10 UTC after.
    const from = Date.UTC(2026, 9, 20)
    const trips = [21, 22, 23, 27, 28].map((d) => tripAt(Date.UTC(2026, 9, d, d < 25 ? 0 : 1, 10)))
    const timeline = timelineOf({ from, days: 14, zone: 'Europe/Vienna', trips })
    const windows = clockWindows(frameOf(timeline))
    expect(inside(windows, '02:05+10')).toEqual([1, 1, 1, 1, 1])
    expect(windows.reduce((sum, w) => sum + w.prior, 0)).toBeCloseTo(1, 10)
    const wide = windows.find((w) => w.key === '12:00+180')!
    expect(wide.insideHours).toBeCloseTo(14 * 3, 6)
  })
})

describe('periodWindows', () => {
  it('finds trips every 37 hours in one phase', () => {
    const trips = [0, 1, 2, 3, 4, 5, 6].map((k) => tripAt(START + 5 * HOUR + k * 37 * HOUR))
    const windows = periodWindows(frameOf(timelineOf({ days: 14, trips })))
    const best = windows.filter((w) => w.inside.every((x) => x === 1)).map((w) => Number.parseFloat(w.key))
    expect(best.some((h) => Math.abs(h - 37) < 0.5)).toBe(true)
  })
})

describe('sunWindows', () => {
  it('follows the sunset through the weeks', () => {
    const trips = [1, 10, 20, 30, 40].map((d) =>
      tripAt(sunTimes(START + d * 24 * HOUR, 47.3, 13.4).sunset! + 10 * MINUTE),
    )
    const windows = sunWindows(frameOf(timelineOf({ days: 45, trips })))
    expect(inside(windows, 'sunset0..20')).toEqual([1, 1, 1, 1, 1])
    expect(inside(windows, 'sunrise0..20')).toEqual([0, 0, 0, 0, 0])
  })
})

describe('rainWindows', () => {
  it('lets standing rain fade by half in its half-life', () => {
    // Kohler & Linsley (1951): P(t) = P(t-1) k + rain; here k = 2^(-Δt / half-life)
    const t = Float64Array.from([0, HOUR, 2 * HOUR, 5 * HOUR])
    expect([...antecedent({ t, v: Float64Array.from([4, 0, 0, 1]) }, 1).v]).toEqual([4, 2, 1, 1.125])
  })

  it('counts the hours after rain as wet', () => {
    const t = Float64Array.from({ length: 168 }, (_, i) => START + i * HOUR)
    const v = Float64Array.from(t, (_, i) => (i === 50 ? 3.9 : 0))
    const trips = [tripAt(START + 53 * HOUR), tripAt(START + 120 * HOUR)]
    const frame = frameOf(timelineOf({ rain: { t, v }, trips }))
    const laws = dryings({ t, v }, null)
    const windows = rainWindows(frame, laws)
    expect(windows.reduce((sum, w) => sum + w.prior, 0)).toBeCloseTo(1, 10)
    // 3.9 mm fade to 0.2 mm in 17 h at a half-life of 4 h: 18 readings lie above
    const wet = windows.find((w) => w.key === 'wet-4-0-0.2')!
    expect([...wet.inside]).toEqual([1, 0])
    expect(wet.insideHours).toBeCloseTo(18, 6)
  })
})
