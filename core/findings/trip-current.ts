import type { Headroom } from '../contract/findings.ts'
import { median } from '../statistics/median.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { tripFacts } from './trip-facts.ts'

/** A ramp test taken once: what such testers and their steps allow, as a share; common practice, no source. */
const ONE_TEST = 0.05
/** Must not open at or below, must open at or below, as shares of IΔn: IEC 61008-1, IEC 61009-1 (from memory). */
const LEAST = 0.5
const MOST = 1
/** Readings this near a trip may be its own rise, by clocks that differ. */
const NEAR_TRIP_MS = 150_000
const STOOD_MORE = 1.05
/** Levels at fewer trips say too little. */
const LEAST_TRIPS = 3

/** The current at which the device really opens, mA, 90 % interval, and what that rests on. */
export type TripCurrent = Headroom['tripMa']

/**
 * Trip current: ramp tests if there are any; else the levels seen at trips of course creep or step; else the limits of
 * the standards. A level before a trip is a lower bound of the trip current.
 */
export function tripCurrent(timeline: Timeline): TripCurrent {
  const ramp = fromRampTests(timeline)
  if (ramp !== null) return ramp
  const stood = stoodAt(timeline)
  return fromLevels(timeline, stood) ?? limits(timeline.rcd.ratedMa, stood)
}

/** The standards' limits, narrowed by the greatest level at which the device stayed closed. */
function limits(rated: number, stood: number): TripCurrent {
  const low = Math.max(LEAST * rated, Math.min(MOST * rated, stood))
  return { value: (low + MOST * rated) / 2, low, high: MOST * rated, basis: 'limits' }
}

/** Greatest reading, mA, not near a trip: the device stood it. 0 without any. Linear. */
function stoodAt({ leakage, trips }: Timeline): number {
  if (leakage === null) return 0
  const { t, v } = leakage
  let most = 0
  let k = 0
  for (let i = 0; i < t.length; i++) {
    while (k < trips.length && trips[k]!.to + NEAR_TRIP_MS < t[i]!) k++
    const near = k < trips.length && trips[k]!.from - NEAR_TRIP_MS <= t[i]!
    if (!near && v[i]! > most) most = v[i]!
  }
  return most
}

function fromRampTests(timeline: Timeline): TripCurrent | null {
  const { rcd } = timeline
  const tests: number[] = []
  for (const test of timeline.tests) if (test.kind === 'ramp' && test.rcd === rcd.ref) tests.push(test.tripMa)
  // The sheet's figure is mostly one of the recorded tests; counted twice it would feign agreement.
  if (rcd.rampTripMa !== undefined && !tests.includes(rcd.rampTripMa)) tests.push(rcd.rampTripMa)
  if (tests.length === 0) return null
  const value = median(tests)
  let least = value * (1 - ONE_TEST)
  let most = value * (1 + ONE_TEST)
  for (const test of tests) {
    least = Math.min(least, test)
    most = Math.max(most, test)
  }
  return { value, low: least, high: most, basis: 'ramp-tests' }
}

/**
 * Taking the last levels as spread evenly below the trip current, it lies above the greatest of n by x ranges with
 * probability (1 + x)^−(n − 1): half of that is the value, a twentieth the upper end. The limits of the standards hold
 * as long as no level stood above them. Null where the levels at trips say nothing.
 */
function fromLevels(timeline: Timeline, stood: number): TripCurrent | null {
  const levels: number[] = []
  for (const fact of tripFacts(timeline)) {
    if (fact.levelMa !== null && (fact.course === 'creep' || fact.course === 'step')) levels.push(fact.levelMa)
  }
  if (levels.length < LEAST_TRIPS) return null
  const rated = timeline.rcd.ratedMa
  const greatest = Math.max(...levels)
  // where it stood far higher levels, the last readings before its trips were too early to tell
  if (stood > STOOD_MORE * greatest) return null
  const range = greatest - Math.min(...levels)
  const beyond = (chance: number): number => greatest + range * (chance ** (-1 / (levels.length - 1)) - 1)
  const low = Math.max(LEAST * rated, greatest)
  const high = Math.max(low, Math.min(MOST * rated, beyond(0.05) < low ? MOST * rated : beyond(0.05)))
  return { value: Math.min(high, Math.max(low, beyond(0.5))), low, high, basis: 'levels-at-trips' }
}
