import type { Pattern } from '../../contract/findings.ts'
import { totalMs } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { episodes } from '../episodes.ts'
import { LEAST_TRIPS, tooFew } from './too-few.ts'

/** A trip known no closer than this has no time of day. */
const VAGUE_MS = 30 * 60_000

/** The trips whose times are known; null when they are too few, and then what is said instead. */
export interface PatternTrips {
  readonly trips: readonly number[] | null
  readonly tooFew: Pattern
}

/** Trips known within half an hour, repeats soon after a reset left out. Epoch ms, in order. */
export function patternTrips(timeline: Timeline): PatternTrips {
  const all = episodes(timeline.trips)
  const known = all.filter((trip) => trip.to - trip.from <= VAGUE_MS).map((trip) => (trip.from + trip.to) / 2)
  const isEnough = known.length >= LEAST_TRIPS && totalMs(timeline.energised) > 0
  return { trips: isEnough ? known : null, tooFew: tooFew(known.length, all.length) }
}
