import { describe, expect, it } from 'vitest'
import { type Schedule, scheduleOf } from '../../../core/findings/timed-steps.ts'
import type { Unexplained } from '../../../core/findings/unexplained.ts'
import { seededRandom } from '../../../core/statistics/random.ts'
import { spansOf } from '../../../core/timeline/spans.ts'
import { HOUR, MINUTE, START, timelineOf } from './timeline-of.ts'

/** Excursions of 20 minutes that begin at the given instants. */
const foundAt = (starts: readonly number[]): Unexplained => ({
  remainder: { t: new Float64Array(0), v: new Float64Array(0) },
  cutMa: 3,
  heightMa: 8,
  excursions: spansOf(starts.map((t) => [t, t + 20 * MINUTE] as const)),
  apart: starts.length,
  follows: null,
})
const day = 24 * HOUR

describe('scheduleOf', () => {
  it('sees a time switch, also through a change of the hour', () => {
    // Vienna: 03:10 local is 01:10 UTC in summer and 02:10 UTC after 2026-10-25
    const from = Date.UTC(2026, 9, 18)
    const starts = Array.from({ length: 14 }, (_, d) => from + d * day + (d < 7 ? 70 : 130) * MINUTE)
    const schedule = scheduleOf(timelineOf({ from, days: 14, zone: 'Europe/Vienna' }), foundAt(starts))
    expect(schedule.kind).toBe('clock')
    expect((schedule as Extract<Schedule, { kind: 'clock' }>).minute).toBeCloseTo(190, 3)
  })

  it('sees a time switch with two times a day as a clock, not as a period', () => {
    const starts = Array.from({ length: 14 }, (_, d) => [
      START + d * day + 4 * HOUR,
      START + d * day + 12 * HOUR,
    ]).flat()
    expect(scheduleOf(timelineOf({ days: 14 }), foundAt(starts)).kind).toBe('clock')
  })

  it('sees a period, and that its timer stands still while the device is open', () => {
    // every 13.3 h under supply, with an outage of five hours in the middle
    const energised = spansOf([
      [START, START + 100 * HOUR],
      [START + 105 * HOUR, START + 14 * day],
    ])
    const starts = Array.from({ length: 24 }, (_, k) => 2 + k * 13.3).map((h) => START + (h < 100 ? h : h + 5) * HOUR)
    const schedule = scheduleOf(timelineOf({ days: 14, energised }), foundAt(starts))
    expect(schedule.kind).toBe('period')
    expect((schedule as Extract<Schedule, { kind: 'period' }>).hours).toBeCloseTo(13.3, 0)
  })

  it('sees nothing in steps at random times', () => {
    let seen = 0
    for (let seed = 0; seed < 60; seed++) {
      const random = seededRandom(seed)
      const starts = Array.from({ length: 20 }, () => START + random.uniform() * 14 * day).sort((a, b) => a - b)
      if (scheduleOf(timelineOf({ days: 14 }), foundAt(starts)).kind !== 'none') seen++
    }
    // p <= 1e-4 after paying: one in sixty would already be a hundred times too often
    expect(seen).toBe(0)
  })

  it('says nothing of four steps', () => {
    const starts = [0, 1, 2, 3].map((d) => START + d * day)
    expect(scheduleOf(timelineOf({ days: 14 }), foundAt(starts)).kind).toBe('none')
  })
})
