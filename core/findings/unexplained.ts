import type { BudgetLine } from '../contract/findings.ts'
import { quantile } from '../statistics/quantile.ts'
import { lowerBound, type Series } from '../timeline/series.ts'
import { contains, measureWithin, type Spans, spansOf, totalMs } from '../timeline/spans.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { thinned } from './windows/held.ts'

const MINUTE_MS = 60_000
/** An excursion stands this share of the trip current above the usual remainder, for at least so many minutes. */
const HIGH_SHARE = 0.12
const LEAST_MINUTES = 2
/** Excursions that begin so soon after a named thing's start are that thing's when most of them do. */
const AFTER_START_MS = 15 * MINUTE_MS
/** An excursion this near before a trip may be the trip's own rise. */
const NEAR_TRIP_MS = 15 * MINUTE_MS

/** What of the leakage no named circuit or load accounts for. */
export interface Unexplained {
  /** Minute levels less what the budget says was on, mA. */
  readonly remainder: Series
  /** Level of the remainder above which it counts as an excursion, mA. */
  readonly cutMa: number
  /** Time above it. */
  readonly excursions: Spans
  /** Median height of the excursions over the usual remainder, mA; 0 without any. */
  readonly heightMa: number
  /** How many excursions began apart from any trip. */
  readonly apart: number
  /** The named thing whose starts most excursions follow, or the one circuit that must be on for them; null when there is none. */
  readonly follows: string | null
}

/**
 * Takes the budget's milliamps of everything that was on away from the minute levels, and finds the stretches in
 * which far more is left than usual: a load that nobody listed, damp, or a fault that comes and goes. `tripMa` is the
 * device's trip current. Linear in minutes and changes.
 */
export function unexplained(
  timeline: Timeline,
  minutes: Series,
  budget: readonly BudgetLine[],
  tripMa: number,
): Unexplained {
  const v = minutes.v.slice()
  for (const thing of timeline.things) {
    const line = budget.find((b) => b.of === thing.of)
    if (line?.ma === null || line?.ma === undefined || line.low === null || line.low <= 0) continue
    const { on } = thing.state
    for (let i = 0; i < on.length; i += 2) {
      const end = lowerBound(minutes.t, on[i + 1]!)
      for (let k = lowerBound(minutes.t, on[i]!); k < end; k++) v[k]! -= line.ma
    }
  }
  const sample = thinned(v, 5_000)
  const usual = quantile(sample, 0.5)
  const cutMa = usual + Math.max(HIGH_SHARE * tripMa, 2 * (quantile(sample, 0.75) - usual))
  const found: [number, number][] = []
  const heights: number[] = []
  let began = -1
  for (let k = 0; k <= v.length; k++) {
    const high = k < v.length && v[k]! > cutMa && contains(timeline.energised, minutes.t[k]!)
    const joined = began >= 0 && k < v.length && minutes.t[k]! - minutes.t[k - 1]! <= 3 * MINUTE_MS
    if (high && began < 0) began = k
    else if (began >= 0 && !(high && joined)) {
      if (k - began >= LEAST_MINUTES) {
        found.push([minutes.t[began]!, minutes.t[k - 1]! + MINUTE_MS])
        heights.push(quantile(v.subarray(began, k), 0.5) - usual)
      }
      began = high ? k : -1
    }
  }
  const excursions = spansOf(found)
  const starts = found.map(([from]) => from)
  const apart = starts.filter(
    (at) => !timeline.trips.some((trip) => trip.from >= at && trip.from - at < NEAR_TRIP_MS),
  ).length
  const heightMa = heights.length === 0 ? 0 : quantile(heights, 0.5)
  return {
    remainder: { t: minutes.t, v },
    cutMa,
    heightMa,
    excursions,
    apart,
    follows: followed(timeline, starts) ?? onlyUnder(timeline, starts),
  }
}

/** The thing within a quarter of an hour of whose starts at least half of the excursions begin, well above chance. */
function followed(timeline: Timeline, starts: readonly number[]): string | null {
  if (starts.length < 2) return null
  const all = totalMs(timeline.energised)
  let best: string | null = null
  let most = 0.5
  for (const thing of timeline.things) {
    const after = spansOf(
      thing.changes.filter((c) => c.on).map((c) => [c.at - 2 * MINUTE_MS, c.at + AFTER_START_MS] as const),
    )
    const chance = measureWithin(after, timeline.from, timeline.to) / all
    const hits = starts.filter((at) => contains(after, at)).length / starts.length
    if (hits > most && hits > 2 * chance) {
      most = hits
      best = thing.of
    }
  }
  return best
}

/** Excursions that should have begun while a circuit was off, were it not for that circuit, before it is named … */
const LEAST_MISSED = 4
/** … and share of them that may have begun all the same, by something else. */
const STRAY = 0.1

/**
 * The one circuit without which hardly an excursion began, though it was off long enough for several: what leaks hangs on
 * it. Null when there is none, or more than one.
 */
function onlyUnder(timeline: Timeline, starts: readonly number[]): string | null {
  const all = totalMs(timeline.energised)
  const found = timeline.things.filter(({ kind, state }) => {
    if (kind !== 'circuit') return false
    const missed = (starts.length * totalMs(state.off)) / all
    return missed >= LEAST_MISSED && starts.filter((at) => contains(state.off, at)).length <= STRAY * missed
  })
  return found.length === 1 ? found[0]!.of : null
}
