import type { TimelineTrip } from '../timeline/timeline.ts'

/** A trip so soon after the device was closed again is the same fault, still there: no news about a rate. */
const EPISODE_MS = 15 * 60_000

/** The trips that count for a rate: of repeats soon after closing again only the first. In order of time. */
export function episodes(trips: readonly TimelineTrip[]): TimelineTrip[] {
  const kept: TimelineTrip[] = []
  let closed = Number.NEGATIVE_INFINITY
  for (const trip of trips) {
    if (trip.from - closed >= EPISODE_MS) kept.push(trip)
    closed = Math.max(closed, trip.restoredAt ?? Number.NEGATIVE_INFINITY)
  }
  return kept
}
