import { lowerBound, usualInterval } from '../timeline/series.ts'
import type { Timeline, TimelineTrip } from '../timeline/timeline.ts'
import { levelBetween } from './levels.ts'

/** Two devices opened together when their times, as people and loggers write them, lie no further apart. */
const TOGETHER_MS = 60_000
/** An interval wider than this is too vague to call anything together. */
const VAGUE_MS = 10 * 60_000
/** EN 50160 (from memory): supply voltage stays within 10 % of the declared one; outside is an event. */
const VOLTAGE_BAND = 0.1

/** Which other devices opened at the time of the trip, by reference, and `supply` when the voltage left its band just before. */
export function sharedWith(timeline: Timeline, trip: TimelineTrip): string[] {
  if (trip.to - trip.from > VAGUE_MS) return []
  const refs = new Set<string>()
  for (const other of timeline.otherTrips) {
    if (other.to - other.from > VAGUE_MS) continue
    if (other.from - TOGETHER_MS <= trip.to && other.to + TOGETHER_MS >= trip.from) refs.add(other.rcd)
  }
  const shared = [...refs].sort()
  if (voltageEvent(timeline, trip)) shared.push('supply')
  return shared
}

/** A reading out of band in the last seconds before the trip; afterwards the open device itself takes the voltage away. */
function voltageEvent(timeline: Timeline, trip: TimelineTrip): boolean {
  const { voltage } = timeline
  if (voltage === null || trip.to !== trip.from) return false
  const interval = usualInterval(voltage)
  const usual = levelBetween(voltage, trip.from - 3_600_000, trip.from - 60_000, 3)
  if (Number.isNaN(usual) || Number.isNaN(interval) || usual <= 0) return false
  const end = lowerBound(voltage.t, trip.from)
  for (let i = end - 1; i >= 0 && trip.from - voltage.t[i]! <= Math.max(10_000, 1.5 * interval); i--) {
    const off = Math.abs(voltage.v[i]! - usual)
    // About nothing is the device open on a clock that runs a little ahead, not an event of the supply.
    if (off > VOLTAGE_BAND * usual && voltage.v[i]! > 0.1 * usual) return true
  }
  return false
}
