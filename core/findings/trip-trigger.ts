import type { BudgetLine } from '../contract/findings.ts'
import { spanAt } from '../timeline/spans.ts'
import type { Change, Thing, Timeline } from '../timeline/timeline.ts'
import type { TripFact } from './trip-facts.ts'

const MINUTE_MS = 60_000
/** What came on so long before a trip without warning may still have fired it; the course allows no more. */
const SUDDEN_MS = MINUTE_MS
/** Before the rise of a step: clocks of loggers and switches differ by seconds. */
const STEP_SLACK_MS = MINUTE_MS
/** An element may warm for some minutes before its leak stands out. */
const CLIMB_SLACK_MS = 4 * MINUTE_MS
/** A climb is a warming or wetting of half an hour at most after switching on. */
const CREEP_MS = 40 * MINUTE_MS
/** From the first sign of a rise to half of it: a jump takes no longer. */
const JUMP_MS = 20_000
/** Switching off may fire a device by its transient, but only at once. */
const OFF_MS = 10_000
/** What runs so soon after closing came back with the supply. */
const COMES_BACK_MS = MINUTE_MS
/** What ends within so much of the trip ended with it. */
const AT_ONCE_MS = 1_000

/** What changed within the delay that the course of a trip allows. */
export interface Trigger {
  readonly thing: Thing
  readonly change: Change
  /** How long before the trip, ms. */
  readonly agoMs: number
}

/**
 * The change most likely to have fired a trip, or null, which is a good answer: for a step what came on round its rise,
 * for a creep what still runs since the climb began, without warning what came on in the last minute. Of several
 * the one with the largest figure in the budget, then the latest.
 */
export function triggerOf(timeline: Timeline, fact: TripFact, lines: readonly BudgetLine[]): Trigger | null {
  const trip = timeline.trips[fact.index]!
  if (fact.course === 'shared' || trip.to - trip.from > 2 * MINUTE_MS) return null
  const end = trip.to
  const since = earliest(fact, trip.from)
  const until =
    fact.course === 'step' && fact.roseAt !== null && !isClimb(fact) ? Math.min(end, fact.roseAt + STEP_SLACK_MS) : end
  let best: { trigger: Trigger; ma: number } | null = null
  for (const thing of timeline.things) {
    const change = changeBehind(thing, fact, trip.from, since, until) ?? cameBack(timeline, thing, trip.from, since)
    if (change === null || (!change.on && endsWithOthers(timeline, thing, change.at))) continue
    const agoMs = Math.max(0, trip.from - change.at)
    // What falls when it comes on has not fired a rise.
    const ma = change.on ? (lines.find((l) => l.of === thing.of)?.ma ?? 0) : 0
    if (ma < 0) continue
    if (best === null || ma > best.ma || (ma === best.ma && agoMs < best.trigger.agoMs)) {
      best = { trigger: { thing, change, agoMs }, ma }
    }
  }
  return best?.trigger ?? null
}

/** Whether the last rise took longer than a jump does between two readings of a slow logger. */
export function isClimb(fact: TripFact): boolean {
  return fact.roseAt !== null && fact.roseFrom !== null && fact.roseAt - fact.roseFrom > JUMP_MS
}

function earliest(fact: TripFact, tripAt: number): number {
  if (fact.course === 'step' && fact.roseFrom !== null) {
    return fact.roseFrom - (isClimb(fact) ? CLIMB_SLACK_MS : STEP_SLACK_MS)
  }
  return tripAt - (fact.course === 'creep' ? CREEP_MS : SUDDEN_MS)
}

/** The change of one thing that may be behind the trip: its last start, unless it ended before the rise; or its end. */
function changeBehind(thing: Thing, fact: TripFact, tripAt: number, since: number, until: number): Change | null {
  let k = lastChange(thing, until)
  // An end at the trip is the trip's doing.
  while (k >= 0 && !thing.changes[k]!.on && thing.changes[k]!.at > tripAt - AT_ONCE_MS) k--
  const last = thing.changes[k]
  if (last === undefined) return null
  if (last.on) return last.at >= since ? last : null
  if (fact.course === 'sudden') return tripAt - last.at <= OFF_MS ? last : null
  const start = thing.changes[k - 1]
  return fact.roseAt !== null && last.at >= fact.roseAt && start?.on && start.at >= since ? start : null
}

/** Whether other things went off with it, and not by its breaker: then the device had opened, and the trip was noted late. */
function endsWithOthers(timeline: Timeline, thing: Thing, at: number): boolean {
  const ended = timeline.things.filter((other) => {
    const last = other.changes[lastChange(other, at + AT_ONCE_MS)]
    return last !== undefined && !last.on && last.at >= at - AT_ONCE_MS
  })
  const byBreaker = ended.some((other) => other.kind === 'circuit' && other.circuit === thing.circuit)
  return ended.some((other) => other !== thing && !(byBreaker && other.circuit === thing.circuit))
}

/** A load that came back with the supply when the device was closed, and runs since: a start too, though nobody switched it. */
function cameBack(timeline: Timeline, thing: Thing, tripAt: number, since: number): Change | null {
  const run = spanAt(thing.state.on, tripAt - 1)
  const supply = spanAt(timeline.energised, tripAt - 1)
  if (thing.kind !== 'load' || run === undefined || supply === undefined || supply.from === timeline.from) return null
  return run.from >= since && run.from - supply.from <= COMES_BACK_MS ? { at: run.from, on: true } : null
}

/** Position of the latest change at or before t, -1 when none. O(log n). */
function lastChange(thing: Thing, t: number): number {
  let low = 0
  let high = thing.changes.length
  while (low < high) {
    const middle = (low + high) >>> 1
    if (thing.changes[middle]!.at <= t) low = middle + 1
    else high = middle
  }
  return low - 1
}
