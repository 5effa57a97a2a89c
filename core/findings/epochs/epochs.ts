import type { Epochs } from '../../contract/findings.ts'
import { quantile } from '../../statistics/quantile.ts'
import { type Random, seededRandom } from '../../statistics/random.ts'
import { localClock } from '../../timeline/local-clock.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { countOf, current, rounded, sentence } from '../words.ts'
import { courseBefore } from './course-before.ts'
import { type EpochAxis, epochAxis } from './epoch-axis.ts'
import { quietTimes, roundTrips } from './quiet-times.ts'

/** Fewer trips than this have no common course. */
const LEAST_TRIPS = 3
/** Of very many trips so many, spread evenly, are laid over each other. */
const MOST_TRIPS = 200
/** Times without a trip that are set against each trip, and sets of them that make the band. */
const CONTROLS = 8
const SETS = 199
const INSIDE = 0.9
/** A stretch counts when at least this part of the trips has a level there. */
const PRESENT = 0.5
/** A rise over the hour that is told, mA. */
const LEAST_RISE_MA = 0.5
const METHOD =
  'superposed epochs (Chree 1913); band: nine of ten sets of as many times without a trip, at the same hours of other days, stay inside throughout'

/**
 * The mean course of the leakage in the hour before all trips with a known instant, with a band from random times of the same hours of the day
 * without a trip (methods.md §4). The band is simultaneous: what leaves it anywhere is beyond what nine of ten such sets do anywhere.
 * At most 115 stretches; too few trips, no log or no other day are answers in words. Draws are seeded. Linear in the readings of the
 * hours looked at.
 *
 * @see Chree (1913), Phil. Trans. R. Soc. A 212, 75-116
 */
export function epochs(timeline: Timeline): Epochs {
  const { leakage } = timeline
  const instants = thinned(timeline.trips.filter((t) => t.from === t.to).map((t) => t.from))
  if (leakage === null) return without(0, 'No leakage is logged, so nothing can be seen of the time before the trips.')
  const axis = epochAxis(timeline)
  const seen = instants
    .map((at) => ({ at, course: courseBefore(timeline, leakage, at, axis) }))
    .filter(({ course }) => course.filter((ma) => !Number.isNaN(ma)).length >= course.length / 4)
  const n = seen.length
  if (n < LEAST_TRIPS) {
    const few = n === 0 ? 'No trip has' : n === 1 ? 'Only one trip has' : `Only ${countOf(n, 'trip')} have`
    return without(
      n,
      `${few} a known moment and a log of the time before it: too few for a common course. A logger that stays on, and the time of each trip to the minute, would help most.`,
    )
  }
  const mean = meanOf(
    seen.map((s) => s.course),
    axis.before.length,
  )
  const random = seededRandom(`epochs ${n} ${Math.round((timeline.to - timeline.from) / 60_000)}`)
  const clock = localClock(timeline.sheet.timeZone)
  const days = clock.days(timeline.from, timeline.to)
  const busy = roundTrips(timeline)
  const controls = seen
    .map(({ at }) =>
      quietTimes(timeline, clock, days, busy, at, CONTROLS, random).map((t) =>
        courseBefore(timeline, leakage, t, axis),
      ),
    )
    .filter((courses) => courses.length >= 2)
  const band = controls.length < Math.max(LEAST_TRIPS, n / 2) ? null : bandOf(controls, n, axis, random)
  return {
    trips: n,
    minutes: [...axis.minutes],
    ma: written(mean),
    low: written(band?.low ?? mean.map(() => Number.NaN)),
    high: written(band?.high ?? mean.map(() => Number.NaN)),
    text: textOf(n, axis, mean, band),
    method: METHOD,
  }
}

interface Band {
  readonly middle: Float64Array
  readonly low: Float64Array
  readonly high: Float64Array
}

function without(trips: number, text: string): Epochs {
  return { trips, minutes: [], ma: [], low: [], high: [], text, method: METHOD }
}

function thinned(list: readonly number[]): readonly number[] {
  if (list.length <= MOST_TRIPS) return list
  return Array.from({ length: MOST_TRIPS }, (_, k) => list[Math.floor((k * list.length) / MOST_TRIPS)]!)
}

/** Mean over the courses that have a level; NaN where too few have. */
function meanOf(courses: readonly Float64Array[], length: number): Float64Array {
  const mean = new Float64Array(length)
  for (let k = 0; k < length; k++) {
    let sum = 0
    let n = 0
    for (const course of courses) {
      const ma = course[k]!
      if (Number.isNaN(ma)) continue
      sum += ma
      n++
    }
    mean[k] = n >= Math.max(1, PRESENT * courses.length) ? sum / n : Number.NaN
  }
  return mean
}

/** Sets of as many times as there are trips, one of each trip's; their middle, and how far they stray at their farthest. */
function bandOf(controls: readonly (readonly Float64Array[])[], n: number, axis: EpochAxis, random: Random): Band {
  const { length } = axis.before
  const sets = Array.from({ length: SETS }, () =>
    meanOf(
      Array.from({ length: n }, (_, i) => random.pick(controls[i % controls.length]!)),
      length,
    ),
  )
  const middle = new Float64Array(length)
  const width = new Float64Array(length)
  for (let k = 0; k < length; k++) {
    const values = sets.map((set) => set[k]!).filter((ma) => !Number.isNaN(ma))
    const mean = values.reduce((sum, ma) => sum + ma, 0) / values.length
    middle[k] = values.length < SETS / 2 ? Number.NaN : mean
    width[k] = Math.sqrt(values.reduce((sum, ma) => sum + (ma - mean) ** 2, 0) / Math.max(1, values.length - 1))
  }
  const farthest = sets.map((set) => {
    let most = 0
    for (let k = 0; k < length; k++) {
      const off = Math.abs(set[k]! - middle[k]!) / width[k]!
      if (off > most && Number.isFinite(off)) most = off
    }
    return most
  })
  const reach = quantile(farthest, INSIDE)
  return {
    middle,
    low: middle.map((ma, k) => ma - reach * width[k]!),
    high: middle.map((ma, k) => ma + reach * width[k]!),
  }
}

function written(values: Float64Array): (number | null)[] {
  return Array.from(values, (ma) => (Number.isNaN(ma) ? null : rounded(ma)))
}

function textOf(n: number, axis: EpochAxis, mean: Float64Array, band: Band | null): string {
  const laid = `${sentence(countOf(n, 'trip'))} with a known moment, laid over each other`
  const last = mean.findLastIndex((ma) => !Number.isNaN(ma))
  if (band === null) {
    return `${laid}: ${current(mean[last]!)} mA just before, ${current(mean[0] ?? Number.NaN)} mA an hour before. What is usual at those hours cannot be said: the log has too few other days at the same hours.`
  }
  const off = mean[last]! - band.middle[last]!
  const side = off >= 0 ? 'above' : 'below'
  const isOut = (k: number): boolean => (off >= 0 ? mean[k]! > band.high[k]! : mean[k]! < band.low[k]!)
  let since = last + 1
  while (since > 0 && (Number.isNaN(mean[since - 1]!) || isOut(since - 1))) since--
  if (since > last) {
    return `${laid}: up to the trip the leakage stays within what is usual at those hours (${current(Math.abs(off))} mA ${side} its middle just before). There is no common warning.${everyDay(mean, band, last)}`
  }
  const ago = axis.before[since]! / 60_000
  const from =
    ago > 55
      ? 'for the whole hour'
      : ago >= 1.5
        ? `from ${Math.round(ago)} minutes before on`
        : `in the last ${Math.max(1, Math.round(axis.before[since]! / 1_000))} seconds`
  return `${laid}: the leakage stands ${side} what is usual at those hours ${from}, by ${current(Math.abs(off))} mA just before the trip.`
}

/** The level rises before trips, but so it does at those hours without one: a timed load that is not alone to blame, or that trips seldom. */
function everyDay(mean: Float64Array, band: Band, last: number): string {
  const first = mean.findIndex((ma) => !Number.isNaN(ma))
  const rise = band.middle[last]! - band.middle[first]!
  const usual = Math.max(LEAST_RISE_MA, band.high[first]! - band.middle[first]!)
  return rise > usual
    ? ` It rises by ${current(mean[last]! - mean[first]!)} mA over the hour, but at those hours it does so without a trip as well.`
    : ''
}
