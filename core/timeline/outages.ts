import { writeInstant } from '../contract/primitives.ts'
import type { Trip } from '../contract/records.ts'
import type { Kept } from './evidence.ts'
import { type Fall, instantOf, stays } from './falls.ts'
import { fallNear, fallWithin, moved, narrowed } from './match-falls.ts'
import type { Series } from './series.ts'
import { clip, type Spans, spansOf } from './spans.ts'
import type { TimelineTrip } from './timeline.ts'

/** Signs of supply sooner than this after a trip belong to the moment of the trip itself, ms. */
const SIGN_SLACK = 60_000
/** Assumed at most, when nobody wrote when the device was closed again and no log shows it, ms. */
const ASSUMED_OUTAGE = 30 * 60_000

/** What the trips of one device are told from. */
export interface OutageInput {
  readonly rcd: string
  readonly from: number
  readonly to: number
  /** Written down, of this device. */
  readonly trips: readonly Kept<Trip>[]
  /** By time. */
  readonly falls: readonly Fall[]
  /** Falls that count as trips nobody wrote down. */
  readonly proposable: (fall: Fall) => boolean
  /** Falls that mean no supply without being a trip of this device alone. */
  readonly dead: (fall: Fall) => boolean
  /** First instant in [t, until) at which something shows that there is supply; Infinity when there is none. */
  readonly nextSign: (t: number, until: number) => number
  /** Last sign of supply at or before `t` and after `after`, where the log is silent from there to `t`; else null. */
  readonly silentSince: (after: number, t: number) => number | null
  /** First reading after `after` from which the leakage log is dead up to `t`, when it was not seen to fall; else null. */
  readonly deadBy: (after: number, t: number) => number | null
  readonly running: readonly Series[]
}

export interface Outages {
  /** Of this device, in or around [from, to), by time. */
  readonly trips: readonly TimelineTrip[]
  /** Time without supply through trips and falls, within [from, to). */
  readonly spans: Spans
  /** Falls that a written trip explains. */
  readonly taken: ReadonlySet<Fall>
  readonly notes: readonly string[]
}

interface Event {
  trip: TimelineTrip
  /** When the device was surely open; an interval-only trip may have opened it before. */
  readonly start: number
  end: number
  /** The end was written down or seen, not assumed. */
  endKnown: boolean
  readonly falls: Fall[]
}

/** Trips of a device with what the log adds to them, and the time it stood open. Linear in falls, n log n in trips. */
export function outagesOf(input: OutageInput): Outages {
  const notes: string[] = []
  const records = [...input.trips].sort((a, b) => byTime(writtenTrip(a), writtenTrip(b)))
  const matched = new Map<Fall, TimelineTrip>()
  const written = records.map((trip) => eventOf(trip, input, matched, notes)).sort(byStart)
  const events = merged(written, notes)
  const assumed: Event[] = []
  for (const [i, event] of events.entries()) {
    const follower = events[i + 1]
    // What trips must have been closed: from the beginning of the interval in which it tripped, where that is known.
    const next =
      follower === undefined
        ? Number.POSITIVE_INFINITY
        : follower.trip.from > event.start
          ? follower.trip.from
          : follower.start
    if (event.endKnown) {
      // Closed and open again before the log saw a level: then the written time is the more exact one.
      const { restoredAt } = event.trip
      if (follower !== undefined && follower.start < event.end && restoredAt !== null)
        event.end = Math.max(event.start, Math.min(event.end, restoredAt))
      continue
    }
    if (!Number.isFinite(event.end)) event.end = Math.min(next, input.to)
    else {
      event.end = Math.min(event.end, next)
      assumed.push(event)
    }
  }
  if (assumed.length > 0)
    notes.push(
      `Nobody wrote when the device was closed again after ${list(assumed.map((e) => writeInstant(e.start)))}, and no log shows it: at most 30 minutes without supply are assumed.`,
    )
  const open = spansOf(events.map((e) => [e.start, e.end] as const))
  const taken = new Set(events.flatMap((e) => e.falls))
  const pairs: (readonly [number, number])[] = []
  const proposed: TimelineTrip[] = []
  for (const fall of input.falls) {
    const until = Math.min(fall.back ?? input.to, input.to)
    if (taken.has(fall)) continue
    const isTrip = input.proposable(fall) && clip(open, fall.from, until).length === 0
    if (isTrip) {
      const { from, to } = instantOf(fall, input.running)
      proposed.push({ id: null, rcd: input.rcd, from, to, narrowed: false, restoredAt: fall.back, running: [] })
      pairs.push([to, until])
    } else if (input.dead(fall)) pairs.push([fall.from, until])
  }
  if (proposed.length > 0)
    notes.push(
      `The log falls to about nothing at ${list(proposed.map((p) => writeInstant(p.to)))} and comes back later, with no trip written down: proposed as trips.`,
    )
  for (const e of events) pairs.push([e.start, e.end])
  return {
    trips: [...events.map((e) => e.trip), ...proposed].sort(byTime),
    spans: clip(spansOf(pairs), input.from, input.to),
    taken,
    notes,
  }
}

/** Order of trips: by time, then the more exact, then by id. */
export function byTime(a: TimelineTrip, b: TimelineTrip): number {
  return a.from - b.from || a.to - b.to || compare(a.id ?? '', b.id ?? '')
}

/** A trip as written, with nothing added. */
export function writtenTrip(trip: Kept<Trip>): TimelineTrip {
  const to = trip.at ?? trip.before ?? 0
  return {
    id: trip.id,
    rcd: trip.rcd,
    from: trip.at ?? Math.min(trip.after ?? to, to),
    to,
    narrowed: false,
    restoredAt: trip.restoredAt ?? null,
    running: trip.running ?? [],
  }
}

function eventOf(record: Kept<Trip>, input: OutageInput, matched: Map<Fall, TimelineTrip>, notes: string[]): Event {
  const plain = writtenTrip(record)
  const free = input.falls.filter((f) => {
    const earlier = matched.get(f)
    return stays(f) && (earlier === undefined || !closedBetween(earlier, plain))
  })
  const fall = record.at === undefined ? fallWithin(free, plain) : fallNear(free, plain)
  if (fall !== undefined) matched.set(fall, plain)
  const trip = record.at === undefined ? narrowed(plain, fall, input, notes) : moved(plain, fall, input.running, notes)
  const start = trip.to
  const falls = fall === undefined ? [] : [fall]
  const back = (fall ?? input.falls.find((f) => stays(f) && f.from <= start && start < (f.back ?? start)))?.back
  if (back != null && back > start) return { trip, start, end: back, endKnown: true, falls }
  if (trip.restoredAt !== null) return { trip, start, end: Math.max(start, trip.restoredAt), endKnown: true, falls }
  // Seen dead and never seen alive again: open until something says otherwise.
  const limit = fall === undefined ? start + ASSUMED_OUTAGE : Number.POSITIVE_INFINITY
  const after = (fall === undefined ? start : Math.max(start, fall.lastDead)) + SIGN_SLACK
  const sign = input.nextSign(after, Math.min(limit, input.to))
  return { trip, start, end: Math.min(limit, sign), endKnown: Number.isFinite(sign), falls }
}

/** Two records of one outage are one trip: the more exact one stays. */
function merged(events: readonly Event[], notes: string[]): Event[] {
  const out: Event[] = []
  for (const event of events) {
    const last = out.at(-1)
    if (last === undefined || !sameOutage(last, event)) {
      out.push(event)
      continue
    }
    const [kept, gone] = width(event.trip) < width(last.trip) ? [event, last] : [last, event]
    notes.push(
      `The outages of two trips of this device overlap (${when(last.trip)} and ${when(event.trip)}): counted as one.`,
    )
    out[out.length - 1] = {
      start: kept === event ? Math.min(event.start, last.start) : last.start,
      end: last.endKnown && event.endKnown ? Math.max(last.end, event.end) : last.endKnown ? last.end : event.end,
      endKnown: last.endKnown || event.endKnown,
      falls: [...last.falls, ...event.falls],
      trip: {
        ...kept.trip,
        restoredAt: kept.trip.restoredAt ?? gone.trip.restoredAt,
        running: [...new Set([...kept.trip.running, ...gone.trip.running])],
      },
    }
  }
  return out
}

/** Whether somebody wrote that the device was closed again after one trip and before the other. */
function closedBetween(a: TimelineTrip, b: TimelineTrip): boolean {
  if (a.restoredAt === null) return false
  return b.from === b.to ? a.restoredAt <= b.to && a.from < b.to : a.restoredAt < b.to
}

function sameOutage(a: Event, b: Event): boolean {
  if (closedBetween(a.trip, b.trip)) return false
  if (b.falls.some((fall) => a.falls.includes(fall)) || b.start === a.start) return true
  if (!a.endKnown) return false
  if (b.start < a.end) return true
  // Found off while the first one's outage lasted, and last known on before it.
  return b.trip.from < b.trip.to && b.trip.to <= a.end && b.trip.from <= a.start
}

function byStart(a: Event, b: Event): number {
  return a.start - b.start || width(a.trip) - width(b.trip) || compare(a.trip.id ?? '', b.trip.id ?? '')
}

function width(trip: TimelineTrip): number {
  return trip.to - trip.from
}

function when(trip: TimelineTrip): string {
  return trip.from === trip.to ? writeInstant(trip.to) : `${writeInstant(trip.from)} to ${writeInstant(trip.to)}`
}

function compare(a: string, b: string): number {
  return a < b ? -1 : a > b ? 1 : 0
}

function list(times: readonly string[]): string {
  return times.length <= 3 ? times.join(', ') : `${times.slice(0, 3).join(', ')} and ${times.length - 3} more times`
}
