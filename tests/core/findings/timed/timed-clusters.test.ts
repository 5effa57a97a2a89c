import { describe, expect, it } from 'vitest'
import { type TimedCluster, timedClusters } from '../../../../core/findings/timed/timed-clusters.ts'
import { timedStepOf } from '../../../../core/findings/timed/timed-step.ts'
import { intersect, spansOf, totalMs } from '../../../../core/timeline/spans.ts'
import { HOUR, loadOn, MINUTE, START, timelineOf } from '../timeline-of.ts'
import { afterSunset, daily, every, type MadeRemainder, madeRemainder } from './made-remainder.ts'

const DAY = 24 * HOUR

function clustersOf(made: MadeRemainder, seed: number): TimedCluster[] {
  return timedClusters(timelineOf({ days: made.days }), madeRemainder(made, seed))
}

describe('timedClusters', () => {
  it('finds half a milliamp on a quiet fifteen, and puts it in words', () => {
    const found = clustersOf({ days: 10, timers: [{ ma: 0.5, minutes: 40, starts: daily(10, 3 + 1 / 6, 1) }] }, 1)
    expect(found).toHaveLength(1)
    const step = timedStepOf(found[0]!)
    expect(step.text).toMatch(
      /^About 0\.(4[5-9]|5[0-5]?) mA for (3[89]|4[012]) minutes, every day at 03:(09|10|11) ± [123] minutes?, on no named load\.$/,
    )
    expect(step).toMatchObject({ schedule: 'clock', days: ['mon', 'tue', 'wed', 'thu', 'fri', 'sat', 'sun'] })
    expect(step.p).toBeLessThan(1e-4)
  })

  it('tells four timers apart: clock, workdays, period and sunset', () => {
    const starts = daily(21, 3, 1)
    const made: MadeRemainder = {
      days: 21,
      timers: [
        { ma: 4, minutes: 200, starts: afterSunset(21, 15) },
        { ma: 2.1, minutes: 40, starts },
        { ma: 1.2, minutes: 20, starts: every(21, 7.4, 2) },
        { ma: 0.8, minutes: 90, starts: daily(21, 9, 1, [0, 1, 2, 3, 4]) },
      ],
    }
    for (const seed of [1, 2, 3]) {
      const [sun, clock, period, workdays, ...others] = clustersOf(made, seed)
      expect(others).toEqual([])
      expect(sun!.schedule).toMatchObject({ kind: 'sun', event: 'sunset' })
      expect(clock!.schedule).toMatchObject({ kind: 'clock' })
      expect(period!.schedule).toMatchObject({ kind: 'period', on: 'wall' })
      expect(workdays!.schedule).toMatchObject({ kind: 'clock', days: ['mon', 'tue', 'wed', 'thu', 'fri'] })
      expect(timedStepOf(sun!).offsetMinutes).toBeCloseTo(15, -1)
      expect(timedStepOf(period!).hours).toBeCloseTo(7.4, 2)
      expect(timedStepOf(workdays!).text).toMatch(/, Mondays to Fridays at (08:59|09:0[01]) ± /)
      expect([sun, clock, period, workdays].map((c) => Math.round(10 * c!.heightMa) / 10)).toEqual([
        expect.closeTo(4, 0),
        expect.closeTo(2.1, 0),
        expect.closeTo(1.2, 0),
        expect.closeTo(0.8, 0),
      ])
      // when it is due by the schedule is when it was planted
      const truth = spansOf(starts.map((t) => [t, t + 40 * MINUTE] as const))
      expect(totalMs(intersect(clock!.due, truth)) / totalMs(truth)).toBeGreaterThan(0.95)
      expect(totalMs(clock!.due) / totalMs(truth)).toBeLessThan(1.25)
    }
  })

  it('finds timers under loads that people use and a compressor that cycles', () => {
    const timers = [
      { ma: 2.1, minutes: 40, starts: daily(21, 3, 1) },
      { ma: 4, minutes: 200, starts: afterSunset(21, 15) },
    ]
    for (const seed of [1, 2, 3, 4]) {
      const found = clustersOf({ days: 21, timers, people: true, cycling: true }, seed)
      expect(found.map(({ schedule }) => schedule.kind)).toEqual(['sun', 'clock'])
    }
  })

  it('takes two times a day as one load', () => {
    const starts = [...daily(14, 3, 1), ...daily(14, 15.5, 1)].sort((a, b) => a - b)
    const found = clustersOf({ days: 14, timers: [{ ma: 1.5, minutes: 10, starts }], people: true }, 5)
    expect(found).toHaveLength(1)
    expect(timedStepOf(found[0]!).text).toMatch(/every day at 0(2:59|3:0[01]) and 15:(29|30|31) ± /)
  })

  it('claims nothing of noise, of people or of a compressor', () => {
    for (let seed = 0; seed < 30; seed++) {
      const people = seed % 3 !== 0
      expect(clustersOf({ days: 14, timers: [], people, cycling: people }, seed)).toEqual([])
    }
  })

  it('leaves steps to the named thing that makes them', () => {
    const starts = daily(14, 5, 1)
    const remainder = madeRemainder({ days: 14, timers: [{ ma: 2, minutes: 30, starts }] }, 6)
    const oven = loadOn(
      'oven',
      starts.map((t) => [t, t + 30 * MINUTE] as const),
      START,
      START + 14 * DAY,
    )
    expect(timedClusters(timelineOf({ days: 14 }), remainder)).toHaveLength(1)
    expect(timedClusters(timelineOf({ days: 14, things: [oven] }), remainder)).toEqual([])
  })

  it('sees that a timer stands still while the device is open', () => {
    const outages = [3, 7, 11, 16].map((day) => [START + day * DAY + 5 * HOUR, START + day * DAY + 8 * HOUR] as const)
    const energised = spansOf([
      [START, outages[0]![0]],
      ...outages.map(([, to], i) => [to, outages[i + 1]?.[0] ?? START + 21 * DAY] as const),
    ])
    const wall = (supplied: number): number =>
      outages.reduce((t, [from, to]) => (t >= from ? t + to - from : t), START + supplied * HOUR)
    const starts = Array.from({ length: 36 }, (_, k) => wall(2 + 13.3 * k))
    const whole = madeRemainder({ days: 21, timers: [{ ma: 2, minutes: 25, starts }] }, 7)
    const keep = [...whole.t.keys()].filter((i) => outages.every(([a, b]) => whole.t[i]! < a || whole.t[i]! >= b))
    const remainder = {
      t: Float64Array.from(keep, (i) => whole.t[i]!),
      v: Float64Array.from(keep, (i) => whole.v[i]!),
    }
    const [found] = timedClusters(timelineOf({ days: 21, energised }), remainder)
    expect(found!.schedule).toMatchObject({ kind: 'period', on: 'supply' })
    expect(timedStepOf(found!).hours).toBeCloseTo(13.3, 1)
  })

  it('keeps to the clock on the wall through a change of the hour', () => {
    // Vienna: 03:10 local is 01:10 UTC in summer and 02:10 UTC from 2026-10-25 on
    const from = Date.UTC(2026, 9, 18)
    const starts = Array.from({ length: 14 }, (_, d) => START + d * DAY + (d < 7 ? 70 : 130) * MINUTE)
    const made = madeRemainder({ days: 14, timers: [{ ma: 1.5, minutes: 30, starts }] }, 10)
    const remainder = { t: made.t.map((t) => t - START + from), v: made.v }
    const [found] = timedClusters(timelineOf({ from, days: 14, zone: 'Europe/Vienna' }), remainder)
    expect(timedStepOf(found!)).toMatchObject({
      schedule: 'clock',
      localTime: expect.stringMatching(/^03:(09|10|11)$/),
    })
  })

  it('works on a logger that reads every five minutes, as far as that goes', () => {
    const made = madeRemainder(
      { days: 21, timers: [{ ma: 2, minutes: 60, starts: daily(21, 3, 1) }], people: true },
      11,
    )
    const keep = (_: number, i: number): boolean => i % 5 === 0
    const [found, ...others] = timedClusters(timelineOf({ days: 21 }), {
      t: made.t.filter(keep),
      v: made.v.filter(keep),
    })
    expect(others).toEqual([])
    expect(timedStepOf(found!)).toMatchObject({ schedule: 'clock', localTime: expect.stringMatching(/^0(2:5|3:0)\d$/) })
    expect(found!.schedule.spreadMinutes).toBeGreaterThanOrEqual(2.5)
  })

  it('says nothing of four runs', () => {
    expect(clustersOf({ days: 4, timers: [{ ma: 2, minutes: 30, starts: daily(4, 3, 0) }] }, 12)).toEqual([])
  })

  it('finds a timer that lost its count in cuts nobody noted, and when it was due since', () => {
    const starts = [0, 1, 2].flatMap((part) => {
      const first = [3, 163.7, 349.1][part]!
      return every(21, 10.6, first).filter((t) => t < START + [150, 330, 504][part]! * HOUR)
    })
    const remainder = madeRemainder({ days: 21, timers: [{ ma: 2, minutes: 25, starts }], people: true }, 13)
    const [found, ...others] = timedClusters(timelineOf({ days: 21 }), remainder)
    expect(others).toEqual([])
    expect(timedStepOf(found!).hours).toBeCloseTo(10.6, 1)
    expect(timedStepOf(found!).text).toContain('began anew')
    const truth = spansOf(starts.map((t) => [t, t + 25 * MINUTE] as const))
    expect(totalMs(intersect(found!.due, truth)) / totalMs(truth)).toBeGreaterThan(0.9)
  })

  it('says so when clock and sun cannot be told apart', () => {
    // round the summer solstice sunset moves by two minutes in ten days, less than this switch errs
    const from = Date.UTC(2026, 5, 15)
    const made = madeRemainder({ days: 10, timers: [{ ma: 2, minutes: 60, starts: daily(10, 19.3, 3) }] }, 8)
    const remainder = { t: made.t.map((t) => t - START + from), v: made.v }
    const [found] = timedClusters(timelineOf({ from, days: 10 }), remainder)
    expect(timedStepOf(found!).text).toContain('cannot be told apart yet')
  })

  it('gives the same schedule in another zone, read on that zone’s clock', () => {
    const remainder = madeRemainder({ days: 14, timers: [{ ma: 1, minutes: 30, starts: daily(14, 3, 1) }] }, 9)
    const [utc] = timedClusters(timelineOf({ days: 14 }), remainder)
    const [tokyo] = timedClusters(timelineOf({ days: 14, zone: 'Asia/Tokyo' }), remainder)
    expect(timedStepOf(utc!).localTime).toMatch(/^0(2:59|3:0[01])$/)
    expect(timedStepOf(tokyo!).localTime).toMatch(/^1(1:59|2:0[01])$/)
    expect(tokyo!.spans).toEqual(utc!.spans)
  })

  it('scales with the readings, and does not mind a thing that never switches', () => {
    const remainder = madeRemainder({ days: 14, timers: [{ ma: 1, minutes: 30, starts: daily(14, 3, 1) }] }, 14)
    const [one] = timedClusters(timelineOf({ days: 14 }), remainder)
    const [three] = timedClusters(timelineOf({ days: 14 }), { t: remainder.t, v: remainder.v.map((x) => 3 * x) })
    const lamp = loadOn('lamp', [[START, START + 14 * DAY]], START, START + 14 * DAY)
    const [beside] = timedClusters(timelineOf({ days: 14, things: [lamp] }), remainder)
    expect(three!.heightMa).toBeCloseTo(3 * one!.heightMa, 9)
    expect(three!.spans).toEqual(one!.spans)
    expect(beside).toEqual(one)
  })

  it('has nothing to say without a log', () => {
    expect(timedClusters(timelineOf({}), { t: new Float64Array(0), v: new Float64Array(0) })).toEqual([])
  })
})
