// Contains information from the tracebase data set, which is made available at http://www.tracebase.org under the Open
// Database License (ODbL).
import { describe, expect, it } from 'vitest'
import { type TimedCluster, timedClusters } from '../../../../core/findings/timed/timed-clusters.ts'
import { seededRandom } from '../../../../core/statistics/random.ts'
import type { Series } from '../../../../core/timeline/series.ts'
import { realLoads } from '../../../scenarios/real-data.ts'
import { HOUR, MINUTE, timelineOf } from '../timeline-of.ts'

interface Planted {
  readonly ma: number
  readonly minutes: number
  readonly startsAt: (day: number) => number
}

/** What real loads, none of them named, would leak as they ran, and a timer on top. */
function leakageOf(house: 'house-b' | 'house-c', seed: number, planted: Planted | null): TimedCluster[] {
  const { loads, from, to } = realLoads(house)
  const random = seededRandom(`${house} ${seed}`)
  const t = loads[0]!.running.t
  const v = Float64Array.from(t, () => 10 + random.normal(0, 0.05))
  for (const { running } of loads) {
    const ma = Math.exp(random.normal(Math.log(0.8), 0.6))
    const known = new Map(Array.from(running.t, (at, i) => [at, running.v[i]!]))
    for (let i = 0; i < t.length; i++) v[i]! += ma * (known.get(t[i]!) ?? 0)
  }
  for (let day = 0; planted !== null && from + planted.startsAt(day) < to; day++) {
    const start = from + planted.startsAt(day) + random.normal(0, 1) * MINUTE
    for (let i = 0; i < t.length; i++) {
      if (t[i]! >= start && t[i]! < start + planted.minutes * MINUTE) v[i]! += planted.ma
    }
  }
  const remainder: Series = { t, v }
  return timedClusters(timelineOf({ from, to, zone: 'Europe/Berlin' }), remainder)
}

describe('loads of real households, none of them named', () => {
  it.each(['house-b', 'house-c'] as const)('%s keeps no schedule', (house) => {
    for (const seed of [1, 2, 3]) expect(leakageOf(house, seed, null)).toEqual([])
  })

  it.each(['house-b', 'house-c'] as const)('%s: a time switch on top is found', (house) => {
    const startsAt = (day: number): number => day * 24 * HOUR + 3 * HOUR + 10 * MINUTE
    for (const seed of [1, 2, 3]) {
      const found = leakageOf(house, seed, { ma: 1.3, minutes: 40, startsAt })
      expect(found).toHaveLength(1)
      const { schedule, heightMa, minutes } = found[0]!
      expect(schedule).toMatchObject({ kind: 'clock', minutes: [expect.closeTo(190, -1)] })
      expect(heightMa).toBeCloseTo(1.3, 0)
      expect(minutes).toBeGreaterThan(37)
      expect(minutes).toBeLessThan(43)
    }
  })

  it.each(['house-b', 'house-c'] as const)('%s: a timer with a period on top is found', (house) => {
    const startsAt = (turn: number): number => (2 + turn * 9.1) * HOUR
    for (const seed of [1, 2, 3]) {
      const found = leakageOf(house, seed, { ma: 1.7, minutes: 25, startsAt })
      expect(found.map(({ schedule }) => schedule.kind)).toEqual(['period'])
      expect(found[0]!.schedule).toMatchObject({ hours: expect.closeTo(9.1, 1) })
    }
  })
})
