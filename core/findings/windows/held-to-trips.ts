import { spansOf, subtract, union } from '../../timeline/spans.ts'
import type { Thing } from '../../timeline/timeline.ts'

/** A thing that goes off so shortly before a trip went off with it: clocks differ by that much. */
const WITH_TRIP_MS = 120_000

/** Reading oftener than this leaves nothing unread that matters. */
const OFTEN_MS = 5_000

/**
 * The thing with its state held up to each trip. When the device opens, everything behind it goes off, and a state
 * logger whose clock runs a little ahead, or that reads once a minute, says so before the trip. Left as it is, every
 * load would seem off at trips and to have fired them by its end. What is read once a minute, and was off at the last
 * reading, may have started since and been cut short by the trip: there its state is unknown.
 */
export function heldToTrips(thing: Thing, trips: readonly { readonly from: number; readonly to: number }[]): Thing {
  const held: [number, number][] = []
  const unread: [number, number][] = []
  const blind = thing.readEveryMs !== null && thing.readEveryMs >= OFTEN_MS ? thing.readEveryMs : 0
  for (const trip of trips) {
    if (trip.to - trip.from > WITH_TRIP_MS) continue
    const last = thing.changes.findLast((c) => c.at <= trip.from)
    if (last !== undefined && !last.on && trip.from - last.at <= WITH_TRIP_MS) held.push([last.at, trip.from])
    else if (blind > 0) unread.push([trip.from - blind, trip.from])
  }
  if (held.length === 0 && unread.length === 0) return thing
  const spans = spansOf(held)
  const ends = new Set(held.map(([at]) => at))
  return {
    ...thing,
    state: { on: union(thing.state.on, spans), off: subtract(thing.state.off, union(spans, spansOf(unread))) },
    changes: thing.changes.filter((c) => c.on || !ends.has(c.at)),
  }
}
