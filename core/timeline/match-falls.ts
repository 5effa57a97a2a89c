import { writeInstant } from '../contract/primitives.ts'
import { type Fall, INSTANT_WITHIN, instantOf } from './falls.ts'
import type { Series } from './series.ts'
import type { TimelineTrip } from './timeline.ts'

/** A clock that a person read may be this far from the logger's, ms. */
const CLOCK_SLACK = 5 * 60_000

/**
 * The fall that a written instant means: the nearest within the slack of clocks, or the one whose end the person wrote
 * down as the restoring, when the trip was written down at the time it was found. Expects falls that stay.
 */
export function fallNear(falls: readonly Fall[], trip: TimelineTrip): Fall | undefined {
  const at = trip.from
  let best: Fall | undefined
  let least = Number.POSITIVE_INFINITY
  for (const fall of falls) {
    const first = fall.lastLive ?? fall.from
    const ended = fall.back !== null && Math.abs(fall.back - (trip.restoredAt ?? Number.NaN)) <= CLOCK_SLACK
    const foundInside = ended && at >= first && at < fall.back!
    const between = at >= first && at <= fall.from
    const distance = between || foundInside ? 0 : Math.min(Math.abs(at - first), Math.abs(at - fall.from))
    if (distance <= CLOCK_SLACK && distance < least) {
      best = fall
      least = distance
    }
  }
  return best
}

/** The fall that a written interval means: the one still dead when it was found, else the last inside. Expects falls that stay. */
export function fallWithin(falls: readonly Fall[], trip: TimelineTrip): Fall | undefined {
  const inside = falls.filter((f) => !f.explained && f.lastLive !== null && f.from > trip.from && f.lastLive < trip.to)
  const found = inside.filter((f) => f.back === null || f.back >= trip.to - CLOCK_SLACK)
  return found.at(-1) ?? inside.at(-1)
}

/** A written instant goes to the log's fall when that lies elsewhere: a person's clock is the rougher one. */
export function moved(
  trip: TimelineTrip,
  fall: Fall | undefined,
  running: readonly Series[],
  notes: string[],
): TimelineTrip {
  if (fall === undefined || fall.lastLive === null || !fall.seen) return trip
  const interval = fall.from - fall.lastLive
  if (trip.from >= fall.lastLive - interval && trip.from <= fall.from + interval) return trip
  const { from, to } = instantOf(fall, running)
  notes.push(
    `The trip written down at ${writeInstant(trip.from)} shows in the log at ${writeInstant(to)}: the log's time is taken.`,
  )
  return { ...trip, from, to }
}

/** What the log says of an interval beside the falls it shows. */
export interface Narrowing {
  readonly running: readonly Series[]
  /** Last level in (after, t], where the log is silent from there to `t`; else null. */
  readonly silentSince: (after: number, t: number) => number | null
  /** First reading after `after` from which the log is dead up to `t`; else null. */
  readonly deadBy: (after: number, t: number) => number | null
}

/**
 * A written interval narrowed to what the log shows of the fall. Without one: to the moment just after its beginning, when
 * the log is dead from there on (the device opened again before the log saw a level), or to the time after the last level
 * when the log falls silent.
 */
export function narrowed(trip: TimelineTrip, fall: Fall | undefined, log: Narrowing, notes: string[]): TimelineTrip {
  let { from, to } = trip
  if (fall !== undefined) {
    const seen = instantOf(fall, log.running)
    from = Math.max(from, Math.min(seen.from, to))
    to = Math.max(from, Math.min(to, seen.to))
  } else {
    const dead = log.deadBy(from, to)
    if (dead !== null) {
      to = dead
      if (to - from <= INSTANT_WITHIN) from = to
    } else from = Math.max(from, log.silentSince(from, to) ?? from)
  }
  if (from === trip.from && to === trip.to) return trip
  const shown = from === to ? `at ${writeInstant(from)}` : `between ${writeInstant(from)} and ${writeInstant(to)}`
  notes.push(`The trip between ${writeInstant(trip.from)} and ${writeInstant(trip.to)} shows in the log ${shown}.`)
  return { ...trip, from, to, narrowed: true }
}
