import type { Headroom } from '../contract/findings.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { levelDrift } from './level-drift.ts'
import { heldLevels, heldQuantile } from './standing.ts'
import { levelTail } from './tail.ts'
import { tripCurrent } from './trip-current.ts'
import { rounded } from './words.ts'

/** Share of IΔn to plan for as standing leakage at most: BS 7671:2018+A2 regulation 531.3.2 (from memory). */
const ADVISED_SHARE = 0.3

/**
 * Standing leakage against what the device trips at (methods.md §1): time-weighted type 8 quantiles over energised
 * time, the trip current with the kind of evidence it comes from, the slow drift of the level and its tail beyond the log.
 */
export function headroom(timeline: Timeline): Headroom {
  const trip = tripCurrent(timeline)
  const levels = timeline.leakage === null ? null : heldLevels(timeline.leakage, timeline.energised)
  const standing =
    levels === null || levels.values.length === 0
      ? null
      : {
          p5: rounded(heldQuantile(levels, 0.05)),
          p50: rounded(heldQuantile(levels, 0.5)),
          p95: rounded(heldQuantile(levels, 0.95)),
          max: rounded(levels.max),
        }
  return {
    tripMa: {
      value: rounded(trip.value),
      low: rounded(trip.low),
      high: rounded(trip.high),
      basis: trip.basis,
    },
    standingMa: standing,
    shareOfRating: standing === null ? null : rounded(standing.p50 / timeline.rcd.ratedMa),
    advisedShare: ADVISED_SHARE,
    drift: levelDrift(timeline),
    tail: levels === null || standing === null ? null : levelTail(timeline, levels, trip.value),
  }
}
