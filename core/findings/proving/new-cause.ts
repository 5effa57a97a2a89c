import type { LevelChange, Reason, TripFinding } from '../../contract/findings.ts'
import { fisherExact } from '../../statistics/fisher-exact.ts'
import { mannKendall } from '../../statistics/mann-kendall.ts'
import { theilSen } from '../../statistics/theil-sen.ts'
import { stateBefore } from '../../timeline/exposure.ts'
import { contains } from '../../timeline/spans.ts'
import type { Timeline, TimelineTrip } from '../../timeline/timeline.ts'
import type { SpokenWindow } from '../suspects.ts'
import { countOf, current, figure, nameOf, pValue, rounded, sentence } from '../words.ts'
import { dayLevels } from './level-change.ts'
import type { Sides } from './rate-change.ts'

const DAY_MS = 86_400_000
/** Below: too unlikely to be the same cause. */
const UNLIKE = 0.05
const RISES = 0.05
const LEAST_DAYS = 6

interface Given {
  readonly sides: Sides
  /** What was repaired, as `of` is written; null when the remedy names nothing. */
  readonly of: string | null
  readonly at: number
  readonly to: number
  readonly level: LevelChange | null
  /** Findings of trips by position in the timeline. */
  readonly found: readonly TripFinding[]
  /** When the first suspect may act; null where that is no set of time. */
  readonly leading: SpokenWindow | null
}

/**
 * A sign that something else makes the device trip since a remedy: trips while the repaired thing was off, trips that look
 * unlike those before (Fisher's exact test of their courses, and of the time in which the first suspect may act), or a level that rose after it. The first that holds; null for none, which
 * proves nothing.
 */
export function newCause(timeline: Timeline, given: Given): Reason | null {
  return whileOff(timeline, given) ?? unlikeBefore(timeline, given) ?? elsewhere(given) ?? rising(timeline, given)
}

function whileOff(timeline: Timeline, { sides, of }: Given): Reason | null {
  const thing = timeline.things.find((t) => t.of === of)
  if (thing === undefined || sides.after.length === 0) return null
  const isOff = (trip: TimelineTrip): boolean =>
    trip.from === trip.to && stateBefore(thing.state, trip.from - 1) === 'off'
  const off = sides.after.filter(isOff).length
  const offBefore = sides.before.filter(isOff).length
  if (off === 0) return null
  // one that used to trip while it was off as well proves no new cause
  if (offBefore > 0 && offBefore / sides.before.length >= 0.5) return null
  const all = sides.after.length
  return {
    text: `${sentence(nameOf(timeline, thing.of))} was off at ${off === all ? (all === 1 ? 'the trip' : `all ${countOf(all, 'trip')}`) : `${off} of ${all} trips`} since the remedy: something else makes the device trip now.`,
    method: 'state of the repaired thing at the trips since',
    figures: { tripsAfter: all, off, tripsBefore: sides.before.length, offBefore },
  }
}

/** Trips that come with a visible rise against those that come without. */
function unlikeBefore(timeline: Timeline, { sides, found }: Given): Reason | null {
  const courses = (trips: readonly TimelineTrip[]): readonly string[] =>
    trips.map((t) => found[timeline.trips.indexOf(t)]?.course ?? 'unseen').filter((c) => c !== 'unseen')
  const [before, after] = [courses(sides.before), courses(sides.after)]
  if (before.length === 0 || after.length === 0) return null
  const looks = [
    { is: (c: string) => c === 'step' || c === 'creep', words: 'after a rise of the leakage' },
    { is: (c: string) => c === 'sudden', words: 'without a warning in the log' },
    { is: (c: string) => c === 'shared', words: 'together with other devices' },
  ]
  let best: { p: number; words: string; a: number; b: number } | null = null
  for (const { is, words } of looks) {
    const [b, a] = [before.filter(is).length, after.filter(is).length]
    const { pTwoSided: p } = fisherExact([
      [b, before.length - b],
      [a, after.length - a],
    ])
    // of two looks that are each other's opposite, the one that the new trips have
    if (p < UNLIKE && a / after.length > b / before.length && (best === null || p < best.p)) best = { p, words, a, b }
  }
  if (best === null) return null
  return {
    text: `The trips since the remedy look different: ${best.a} of ${after.length} came ${best.words}, before it ${best.b} of ${before.length} (${pValue(best.p)}). A new cause is likely.`,
    method: "courses before and after, Fisher's exact test (1935)",
    figures: { after: after.length, afterSo: best.a, before: before.length, beforeSo: best.b, p: rounded(best.p) },
  }
}

/** Trips within the time of the first suspect, before and after: once it was, now it is not, or the other way round. */
function elsewhere({ sides, leading }: Given): Reason | null {
  if (leading === null) return null
  const counts = (trips: readonly TimelineTrip[]): readonly [number, number] => {
    const known = trips.filter((t) => t.from === t.to && contains(leading.known, t.from - 1))
    const inside = known.filter((t) => contains(leading.inside, t.from - 1)).length
    return [inside, known.length - inside]
  }
  const [before, after] = [counts(sides.before), counts(sides.after)]
  const [nb, na] = [before[0] + before[1], after[0] + after[1]]
  if (nb === 0 || na === 0) return null
  const { pTwoSided: p } = fisherExact([before, after])
  if (!(p < UNLIKE)) return null
  return {
    text: `Before the remedy ${before[0]} of ${nb} trips fell ${leading.words}, since then ${after[0]} of ${na} (${pValue(p)}): hardly the same cause.`,
    method: "time of the first suspect before and after, Fisher's exact test (1935)",
    figures: { before: nb, beforeInside: before[0], after: na, afterInside: after[0], p: rounded(p) },
  }
}

function rising(timeline: Timeline, { at, to, level }: Given): Reason | null {
  if (level !== null && level.low > 0) {
    return {
      text: `The standing leakage is ${current(level.changeMa)} mA higher than before the remedy (between ${current(level.low)} and ${current(level.high)} mA): something leaks now that did not, or was put on this device.`,
      method: level.method,
      figures: { changeMa: level.changeMa, low: level.low, high: level.high },
    }
  }
  const days = dayLevels(timeline, at, to)
  if (days.length < LEAST_DAYS) return null
  const levels = days.map((d) => d.ma)
  const test = mannKendall(levels)
  const { slope } = theilSen(
    days.map((d) => d.at / DAY_MS),
    levels,
  )
  if (!(test.p < RISES) || slope <= 0) return null
  return {
    text: `The standing leakage has risen since the remedy, by ${figure(slope)} mA a day over ${countOf(days.length, 'day')} (${pValue(test.p)}): something is getting worse.`,
    method: 'medians of days, Mann–Kendall test and Theil–Sen slope (Sen 1968)',
    figures: { maPerDay: rounded(slope), days: days.length, p: rounded(test.p) },
  }
}
