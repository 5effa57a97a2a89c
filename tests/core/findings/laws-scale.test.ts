import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { Findings } from '../../../core/contract/findings.ts'
import { findings } from '../../../core/findings/findings.ts'
import type { Evidence } from '../../../core/timeline/evidence.ts'
import { LAW_SEEDS, madeSite } from './laws-site.ts'

const FEW = { numRuns: 2 }
const site = fc.constantFrom(...LAW_SEEDS)
/** Powers of two, so that nothing is rounded on the way in. */
const times = fc.constantFrom(2, 4)

/** Evidence in which every milliamp is so many times as much: readings, rating, ramp tests, digits of the clamp. */
function scaled(evidence: Evidence, by: number): Evidence {
  const { sheet } = evidence
  const leakage = new Set(sheet.channels.filter((c) => c.quantity === 'leakage').map(({ ref }) => ref))
  return {
    ...evidence,
    sheet: {
      ...sheet,
      rcds: sheet.rcds.map((rcd) => ({ ...rcd, ratedMa: rcd.ratedMa * by })),
      channels: sheet.channels.map((channel) =>
        leakage.has(channel.ref) ? { ...channel, resolutionMa: (channel.resolutionMa ?? 0.01) * by } : channel,
      ),
    },
    series: new Map(
      [...evidence.series].map(([ref, series]) => [
        ref,
        leakage.has(ref) ? { t: series.t, v: series.v.map((ma) => ma * by) } : series,
      ]),
    ),
    tests: evidence.tests.map((test) => (test.kind === 'ramp' ? { ...test, tripMa: test.tripMa * by } : test)),
  }
}

/** Every milliamp of the findings, in order. */
function figuresOf({ headroom, budget, trips, epochs }: Findings): (number | null)[] {
  const { standingMa: standing, tripMa: trip } = headroom
  return [
    ...[standing?.p5, standing?.p50, standing?.p95, standing?.max].map((ma) => ma ?? null),
    trip.value,
    trip.low,
    trip.high,
    ...budget.flatMap(({ ma, low, high }) => [ma, low, high]),
    ...trips.flatMap(({ levelMa, usualMa, shares }) => [levelMa, usualMa ?? null, ...shares.map(({ ma }) => ma)]),
    ...(epochs?.ma ?? []),
    ...(epochs?.low ?? []),
    ...(epochs?.high ?? []),
  ]
}

describe('with so many times the current everywhere', () => {
  it('every milliamp is so many times as much, and nothing else of level and trips changes', () => {
    fc.assert(
      fc.property(site, times, (seed, by) => {
        const { evidence, found } = madeSite(seed)
        const more = findings(scaled(evidence, by))
        const before = figuresOf(found)
        const after = figuresOf(more)
        expect(after.length).toBe(before.length)
        before.forEach((ma, i) => {
          if (ma === null) expect(after[i]).toBeNull()
          // six figures are given, so each may be off by half of the last one
          else expect(Math.abs(after[i]! - by * ma)).toBeLessThanOrEqual(1.5e-5 * Math.abs(by * ma))
        })
        expect(more.trips.map(({ course, trigger }) => [course, trigger])).toEqual(
          found.trips.map(({ course, trigger }) => [course, trigger]),
        )
        expect(more.headroom.shareOfRating).toEqual(found.headroom.shareOfRating)
      }),
      FEW,
    )
  })

  // With a log they may change: what a sound appliance leaks at most is a matter of milliamps, not of the rating (IEC 60335-1 clause 13.2).
  it('no probability changes where nobody logged the leakage', () => {
    fc.assert(
      fc.property(site, fc.double({ min: 0.1, max: 100, noNaN: true }), (seed, by) => {
        const { evidence } = madeSite(seed)
        const series = new Map([...evidence.series].filter(([ref]) => !ref.startsWith('tails')))
        const diary = { ...evidence, series }
        const odds = ({ suspects }: Findings): unknown => suspects.map(({ of, probability }) => [of, probability])
        expect(odds(findings(scaled(diary, by)))).toEqual(odds(findings(diary)))
      }),
      FEW,
    )
  })
})
