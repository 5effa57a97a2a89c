import { contains, intersect, spansOf, subtract, union } from '../../timeline/spans.ts'
import type { Change, Thing } from '../../timeline/timeline.ts'
import type { Blind } from './trip-share.ts'

/** A thing that goes off so shortly before a trip went off with it: clocks differ by that much. */
const WITH_TRIP_MS = 120_000

/** Reading oftener than this leaves nothing unread that matters. */
const OFTEN_MS = 5_000

/** A thing as the line-up looks at it. */
export interface HeldThing {
  readonly thing: Thing
  readonly blind: Blind | null
}

/**
 * The thing with its state held up to each trip. When the device opens, everything behind it goes off, and a state
 * logger whose clock runs a little ahead, or that reads once a minute, says so before the trip. Left as it is, every
 * load would seem off at trips and to have fired them by its end. What is read once a minute, and was off at the last
 * reading, may have started since and been cut short by the trip.
 */
export function heldToTrips(thing: Thing, trips: readonly { readonly from: number; readonly to: number }[]): HeldThing {
  const held: [number, number][] = []
  const unread = new Uint8Array(trips.length)
  const blindMs = thing.readEveryMs !== null && thing.readEveryMs >= OFTEN_MS ? thing.readEveryMs : 0
  trips.forEach((trip, i) => {
    if (trip.to - trip.from > WITH_TRIP_MS) return
    const last = lastUpTo(thing.changes, trip.from)
    if (last !== undefined && !last.on && trip.from - last.at <= WITH_TRIP_MS) held.push([last.at, trip.from])
    else if (blindMs > 0 && contains(thing.state.off, trip.from - 1)) unread[i] = 1
  })
  const spans = spansOf(held)
  const ends = new Set(held.map(([at]) => at))
  const whole: Thing =
    held.length === 0
      ? thing
      : {
          ...thing,
          state: { on: union(thing.state.on, spans), off: subtract(thing.state.off, spans) },
          changes: thing.changes.filter((c) => c.on || !ends.has(c.at)),
        }
  if (blindMs === 0) return { thing: whole, blind: null }
  const starts = whole.changes.filter((c) => c.on).map(({ at }) => [at, at + blindMs] as const)
  return { thing: whole, blind: { unread, fresh: intersect(spansOf(starts), whole.state.on) } }
}

/** The last change at or before the instant. O(log n). */
function lastUpTo(changes: readonly Change[], t: number): Change | undefined {
  let low = 0
  let high = changes.length
  while (low < high) {
    const middle = (low + high) >>> 1
    if (changes[middle]!.at <= t) low = middle + 1
    else high = middle
  }
  return changes[low - 1]
}
