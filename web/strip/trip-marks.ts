import type { TripFinding } from '../../core/contract/findings.ts'
import type { TripMark } from './flags.ts'

/** Where a trip stands on the time axis; null for one without any time. */
export function markOf(trip: Pick<TripFinding, 'at' | 'after' | 'before'>, number: number): TripMark | null {
  if (trip.at !== null) return { number, from: Date.parse(trip.at), to: Date.parse(trip.at) }
  if (trip.after === null || trip.before === null) return null
  return { number, from: Date.parse(trip.after), to: Date.parse(trip.before) }
}

/** Marks of all trips, numbered as in the table. */
export function marksOf(trips: readonly Pick<TripFinding, 'at' | 'after' | 'before'>[]): TripMark[] {
  return trips.map((trip, i) => markOf(trip, i + 1)).filter((mark) => mark !== null)
}
