import type { TripFinding } from '../contract/findings.ts'
import { GAP_INTERVALS, lowerBound, type Series, usualInterval } from '../timeline/series.ts'
import type { Timeline, TimelineTrip } from '../timeline/timeline.ts'
import { groupAccuracy } from './accuracy.ts'
import { levelBetween, medianInPlace, readingsWithin } from './levels.ts'
import { sharedWith } from './shared-trips.ts'

const MINUTE_MS = 60_000
const HOUR_MS = 60 * MINUTE_MS

/** A rise is one when it stands this many noise widths above the level before, and is this share of IΔn. */
const NOISE_WIDTHS = 5
const LEAST_RISE = 0.02
/** Last rise within this much time (or three readings) is a step, over longer a creep. */
const STEP_MS = 5 * MINUTE_MS
/** A level below this share of the least trip current is not yet within a step's reach of it; common practice, no source. */
const WITHIN_REACH = 0.6
/** Where the level has stood this near for an hour, a creep may have taken many hours: wet insulation does. */
const NEAR = 0.8
const SLOW_CREEP_HOURS = 8
/** How far back the beginning of a rise is looked for: an element warms for half an hour at most. */
const LOOK_BACK_MS = 30 * MINUTE_MS

/** What the leakage log shows of one trip. Currents mA, times epoch ms. */
export interface TripFact {
  /** Position in `timeline.trips`. */
  readonly index: number
  /** Last reading before the trip; null when none is near enough. */
  readonly levelMa: number | null
  /** Median of the energised hour before. */
  readonly usualMa: number | null
  /** Level at the trip over that a few minutes before. */
  readonly riseMa: number | null
  /** When that rise was half done; null when there was none. */
  readonly roseAt: number | null
  /** When it began to stand out from the level before; with a jump the same reading. Null when there was none. */
  readonly roseFrom: number | null
  /** Slope over the last half hour without the last minutes. */
  readonly slopeMaPerMin: number | null
  /** Usual difference of one reading from the next, as a standard deviation. */
  readonly noiseMa: number | null
  readonly course: TripFinding['course']
  /** Other devices that opened at the same time, and `supply` when the voltage stepped out of its band. */
  readonly sharedWith: readonly string[]
}

/** The facts of every trip of the device, in order (methods.md §4). Linear in the readings of the hours before trips. */
export function tripFacts(timeline: Timeline): TripFact[] {
  return timeline.trips.map((trip, index) => factOf(timeline, trip, index))
}

const UNSEEN = {
  levelMa: null,
  usualMa: null,
  riseMa: null,
  roseAt: null,
  roseFrom: null,
  slopeMaPerMin: null,
  noiseMa: null,
  course: 'unseen',
} as const

function factOf(timeline: Timeline, trip: TimelineTrip, index: number): TripFact {
  const shared = sharedWith(timeline, trip)
  const seen = timeline.leakage === null ? null : lookBefore(timeline, timeline.leakage, trip)
  const fact = { index, ...(seen ?? UNSEEN), sharedWith: shared }
  return shared.length > 0 ? { ...fact, course: 'shared' } : fact
}

function lookBefore(
  timeline: Timeline,
  leakage: Series,
  trip: TimelineTrip,
): Omit<TripFact, 'index' | 'sharedWith'> | null {
  const interval = usualInterval(leakage)
  const near = GAP_INTERVALS * interval
  if (Number.isNaN(interval) || trip.to - trip.from > near) return null
  const hour = readingsWithin(leakage, timeline.energised, trip.from - HOUR_MS, trip.from + 1)
  if (hour.t.length === 0) return null
  const usualMa = medianInPlace(hour.v.slice())
  const last = lastLive(leakage, trip, near, usualMa)
  if (last < 0) return null
  const end = leakage.t[last]!
  const levelMa = leakage.v[last]!

  const stepMs = Math.max(STEP_MS, 3 * interval)
  const base = baseBefore(timeline, leakage, end - stepMs, interval) ?? usualMa
  const noiseMa = noiseOf(timeline, leakage, end - stepMs, hour)
  const threshold = Math.max(NOISE_WIDTHS * noiseMa, LEAST_RISE * timeline.rcd.ratedMa)
  const riseMa = levelMa - base
  const stepped = riseMa > threshold
  const slope = slopeBefore(timeline, leakage, end - stepMs, interval)
  const least = timeline.rcd.rampTripMa ?? 0.5 * timeline.rcd.ratedMa
  const hours = usualMa >= NEAR * least ? SLOW_CREEP_HOURS : 1
  const crept = Math.max(...[1, hours].map((h) => creepOf(timeline, leakage, end, h, interval, threshold)))
  const drifting = crept > threshold && levelMa >= WITHIN_REACH * least
  const course = drifting && crept >= riseMa ? 'creep' : stepped ? 'step' : drifting ? 'creep' : 'sudden'
  return {
    levelMa,
    usualMa,
    riseMa,
    roseAt: stepped ? risenSince(leakage, last, end - stepMs, base + riseMa / 2) : null,
    roseFrom: stepped
      ? risenSince(leakage, last, end - LOOK_BACK_MS, base + Math.max(0.1 * riseMa, threshold / 2))
      : null,
    slopeMaPerMin: slope,
    noiseMa,
    course,
  }
}

/** Index of the last reading before the trip that is not yet its fall to nothing; -1 when none is near enough. */
function lastLive(leakage: Series, trip: TimelineTrip, near: number, usualMa: number): number {
  const isInstant = trip.from === trip.to
  let i = lowerBound(leakage.t, isInstant ? trip.from : trip.from + 1) - 1
  while (i >= 0 && trip.from - leakage.t[i]! <= near && leakage.v[i]! < 0.1 * usualMa) i--
  return i >= 0 && trip.from - leakage.t[i]! <= near ? i : -1
}

/** Level of a quarter of an hour (or ten readings) before `to`; null when the device was open or the log silent then. */
function baseBefore(timeline: Timeline, leakage: Series, to: number, interval: number): number | null {
  const before = readingsWithin(leakage, timeline.energised, to - Math.max(15 * MINUTE_MS, 10 * interval), to, 400)
  return before.v.length < 2 ? null : medianInPlace(before.v)
}

/** Robust noise of single readings: scaled median of the differences of neighbours, at least half a digit of the clamp. */
function noiseOf(timeline: Timeline, leakage: Series, to: number, hour: Series): number {
  const a = lowerBound(leakage.t, Math.max(hour.t[0]!, to - HOUR_MS))
  const b = Math.min(lowerBound(leakage.t, to), a + 4_000)
  const differences = new Float64Array(Math.max(0, b - a - 1))
  for (let i = 0; i < differences.length; i++) differences[i] = Math.abs(leakage.v[a + i + 1]! - leakage.v[a + i]!)
  // 1.4826 makes a median a standard deviation; a difference of two readings has twice the variance of one.
  const noise = differences.length === 0 ? 0 : (1.4826 * medianInPlace(differences)) / Math.SQRT2
  return Math.max(noise, groupAccuracy(timeline).digitMa / 2)
}

/** Since when the level has stood at `level` or above without a break, ms; looks back no further than `from`. */
function risenSince(leakage: Series, last: number, from: number, level: number): number {
  let i = last
  while (i > 0 && leakage.t[i - 1]! >= from && leakage.v[i - 1]! >= level) i--
  return leakage.t[i]!
}

/** mA per minute over the half hour before `to`: last third against first third; null without both. */
function slopeBefore(timeline: Timeline, leakage: Series, to: number, interval: number): number | null {
  const span = Math.max(30 * MINUTE_MS, 9 * interval)
  const from = Math.max(to - span, energisedSince(timeline, to))
  const third = (to - from) / 3
  const first = levelBetween(leakage, from, from + third)
  const last = levelBetween(leakage, to - third, to)
  return Number.isNaN(first + last) || third <= 0 ? null : (last - first) / ((2 * third) / MINUTE_MS)
}

/**
 * How much the level crept up over the hours before: the rise of smoothed levels (twelfths of the time) up to the trip, as
 * far back as it went on rising; 0 when one of them made most of it, for a single jump is no creep, or when there is too little to see.
 */
function creepOf(
  timeline: Timeline,
  leakage: Series,
  end: number,
  hours: number,
  interval: number,
  threshold: number,
): number {
  const span = Math.max(hours * HOUR_MS, 12 * interval)
  const from = Math.max(end - span, energisedSince(timeline, end))
  const part = (end + 1 - from) / 12
  if (part < interval) return 0
  const levels: number[] = []
  for (let k = 0; k < 12; k++) {
    const level = levelBetween(leakage, from + k * part, from + (k + 1) * part)
    if (!Number.isNaN(level)) levels.push(level)
  }
  if (levels.length < 5) return 0
  let start = levels.length - 1
  while (start > 0 && levels[start - 1]! <= levels[start]! + threshold / 10) start--
  let largest = 0
  for (let k = start + 1; k < levels.length; k++) largest = Math.max(largest, levels[k]! - levels[k - 1]!)
  const rise = levels.at(-1)! - levels[start]!
  // Spread evenly over m parts the largest is rise / m; one jump makes it the whole.
  return largest > 0.7 * rise ? 0 : rise
}

/** Beginning of the energised stretch that holds or ends at `t`. */
function energisedSince(timeline: Timeline, t: number): number {
  const { energised } = timeline
  let since = timeline.from
  for (let i = 0; i < energised.length && energised[i]! < t; i += 2) since = energised[i]!
  return since
}
