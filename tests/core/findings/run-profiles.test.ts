import { describe, expect, it } from 'vitest'
import { runProfiles } from '../../../core/findings/run-profiles.ts'
import { seriesOf } from '../../../core/timeline/series.ts'
import { HOUR, loadOn, MINUTE, START, timelineOf } from './timeline-of.ts'

const TO = START + 24 * HOUR
/** Six runs of forty minutes; another load comes on two minutes into each of them. */
const STARTS = [2, 5, 8, 11, 14, 17].map((h) => START + h * HOUR)
const heater = loadOn(
  'heater',
  STARTS.map((t) => [t, t + 40 * MINUTE] as const),
  START,
  TO,
)
const fan = loadOn(
  'fan',
  STARTS.map((t) => [t + 2 * MINUTE, t + 60 * MINUTE] as const),
  START,
  TO,
)

/** Climbs by 1 mA a minute for eight minutes, then stays; the fan adds 2 mA. One run leaks twice as much. */
function level(t: number): number {
  let sum = 6
  STARTS.forEach((start, k) => {
    if (t >= start && t < start + 40 * MINUTE) sum += (k === 3 ? 2 : 1) * Math.min(8, (t - start) / MINUTE)
    if (t >= start + 2 * MINUTE && t < start + 60 * MINUTE) sum += 2
  })
  return sum
}

const t = Array.from({ length: 24 * 720 }, (_, i) => START + i * 5_000)
const timeline = timelineOf({
  days: 1,
  things: [heater, fan],
  leakage: seriesOf(t, t.map(level)),
  logged: Float64Array.of(START, TO),
})
const lines = [{ of: 'load:fan', ma: 2, low: 1.9, high: 2.1, basis: 'switching' as const, switchings: 12 }]

describe('runProfiles', () => {
  const profile = runProfiles(timeline, lines).get('load:heater')!

  it('follows the climb, less what other loads add meanwhile', () => {
    expect(profile.runs).toBe(6)
    expect(profile.buckets.map((b) => [b.fromMinutes, b.toMinutes])).toEqual([
      [0, 1],
      [1, 3],
      [3, 10],
      [10, 30],
      [30, 120],
    ])
    // Middle of the first minute, less the settling of two readings: about half a milliamp.
    expect(profile.buckets[0]!.medianMa).toBeGreaterThan(0.4)
    expect(profile.buckets[0]!.medianMa).toBeLessThan(0.7)
    expect(profile.buckets[3]!.medianMa).toBeCloseTo(8, 6)
    expect(profile.riseMa).toBeCloseTo(8, 6)
  })

  it('keeps the worst run apart from the usual one', () => {
    expect(profile.largestMa).toBeCloseTo(16, 6)
  })

  it('ends a run with the run', () => {
    expect(profile.buckets.at(-1)!.runs).toBe(6)
    expect(profile.buckets.at(-1)!.medianMa).toBeCloseTo(8, 6)
  })

  it('has no rise without a start in the log', () => {
    const idle = timelineOf({ days: 1, things: [heater] })
    expect(runProfiles(idle).get('load:heater')).toMatchObject({ runs: 0, riseMa: null, largestMa: null, buckets: [] })
  })
})
