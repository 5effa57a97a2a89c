import { spansOf, subtract, union } from '../../timeline/spans.ts'
import type { Thing } from '../../timeline/timeline.ts'

/** A thing that goes off so shortly before a trip went off with it: clocks differ by that much. */
const WITH_TRIP_MS = 120_000

/**
 * The thing with its state held up to each trip. When the device opens, everything behind it goes off, and a state
 * logger whose clock runs a little ahead, or that reads once a minute, says so before the trip. Left as it is, every
 * load would seem off at trips and to have fired them by its end.
 */
export function heldToTrips(thing: Thing, trips: readonly { readonly from: number; readonly to: number }[]): Thing {
  const held: [number, number][] = []
  for (const trip of trips) {
    if (trip.to - trip.from > WITH_TRIP_MS) continue
    const last = thing.changes.findLast((c) => c.at <= trip.from)
    if (last !== undefined && !last.on && trip.from - last.at <= WITH_TRIP_MS) held.push([last.at, trip.from])
  }
  if (held.length === 0) return thing
  const spans = spansOf(held)
  const ends = new Set(held.map(([at]) => at))
  return {
    ...thing,
    state: { on: union(thing.state.on, spans), off: subtract(thing.state.off, spans) },
    changes: thing.changes.filter((c) => c.on || !ends.has(c.at)),
  }
}
