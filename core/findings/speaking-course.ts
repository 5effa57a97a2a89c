import type { TripFinding } from '../contract/findings.ts'
import type { Timeline, TimelineTrip } from '../timeline/timeline.ts'
import type { Measured } from './candidates.ts'
import type { LogView } from './log-view.ts'

/** What came on so long before a trip may have made its last rise. */
const BEFORE_MS = 6 * 60_000
/** A last level below this share of the least trip current is no step to it. */
const NEAR = 0.8
/** Share of the rise that what came on usually adds, from which on it explains the rise. */
const EXPLAINED = 0.6

/**
 * The course of a trip as far as it speaks for a cause. A rise that is no more than what the things that had just come on
 * always add, to a level still far below the trip current, was there by chance: then the trip came without warning.
 */
export function speakingCourse(
  timeline: Timeline,
  trip: TimelineTrip,
  { trips, headroom }: Measured,
  { lifts }: LogView,
): TripFinding['course'] {
  const found = trips[timeline.trips.indexOf(trip)]
  if (found === undefined) return 'unseen'
  const { course, levelMa, usualMa } = found
  if ((course !== 'step' && course !== 'creep') || levelMa === null || usualMa === null) return course
  if (levelMa >= NEAR * headroom.tripMa.low) return course
  const usual = timeline.things.reduce((sum, { of, changes }) => {
    const started = changes.some(({ at, on }) => on && at <= trip.from && trip.from - at <= BEFORE_MS)
    return sum + (started ? (lifts.get(of)?.usualMa ?? 0) : 0)
  }, 0)
  return usual >= EXPLAINED * (levelMa - usualMa) ? 'sudden' : course
}
