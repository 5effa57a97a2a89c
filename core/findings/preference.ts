import { holm } from '../statistics/holm.ts'
import { poissonRateRatio } from '../statistics/poisson-rate-ratio.ts'
import { localClock } from '../timeline/local-clock.ts'
import type { Spans } from '../timeline/spans.ts'
import type { ExposureWindow } from './line-up.ts'
import { type Family, shiftFamily } from './preferring/shift-family.ts'
import { type Stratified, stratified } from './preferring/stratified.ts'
import { stratifier } from './preferring/stratum-exposure.ts'
import type { Frame } from './windows/trip-share.ts'

/** Whether trips prefer the time inside a window to the time outside. */
export interface Preference {
  readonly of: string
  readonly window: ExposureWindow
  /** Trips inside; a share for trips known as intervals. */
  readonly inside: number
  readonly trips: number
  /** Trips expected inside if they fell anywhere. */
  readonly expected: number
  /** Ratio of the rates inside and outside with 90 % limits; infinite when all fell inside. */
  readonly ratio: number | null
  readonly low: number
  readonly high: number
  /** One-sided exact p, and the same adjusted by Holm for every window tried here. */
  readonly p: number
  readonly pAdjusted: number
  /** Chance that the best of all windows tried, of all suspects, fits as well by chance; null where it is no set of time. */
  readonly pFamily: number | null
  /** The same question with like hours compared; null where no trip is inside or the window is no set of time. */
  readonly byHour: Stratified | null
  /** With the same hour of the same weekday within four weeks; null in short spans or when too few trips tell. */
  readonly crossover: Stratified | null
}

/** A suspect, the window to speak of, and every window that was tried for it. */
export interface Tested {
  readonly of: string
  readonly window: ExposureWindow
  readonly family: readonly ExposureWindow[]
}

/** A span shorter than this has no referents on the same weekday. */
const LEAST_CROSSOVER_MS = 21 * 86_400_000
/** Fewer telling trips than this make no case-crossover. */
const LEAST_TELLING = 3
/** Windows of all suspects that shifts look at; more would cost too much. */
const MOST_WINDOWS = 200

/**
 * Do trips prefer an exposure (methods.md §5)? Exact conditional tests of rates inside against outside (Przyborowski &
 * Wilenski 1940), one a window, adjusted together (Holm 1979); the same with like hours compared, where habits confound; and the
 * largest statistic of all windows under circular shifts. Trips spread over an interval count as the whole number next below
 * their expected count, so that spreading never makes a test bolder. Order of trips and suspects does not matter.
 */
export function preferences(frame: Frame, tested: readonly Tested[]): Preference[] {
  const { timeline, trips } = frame
  const hours = Math.max(frame.hours, 1e-9)
  const clock = localClock(timeline.sheet.timeZone)
  const byHour = stratifier(clock, timeline.from, timeline.to, 'hour')
  const byWeekday =
    timeline.to - timeline.from < LEAST_CROSSOVER_MS
      ? null
      : stratifier(clock, timeline.from, timeline.to, 'weekday-hour')
  const families = familiesOf(tested)
  const paid = shiftFamily(timeline.energised, trips, families, `${trips.length} ${Math.round(hours)}`)
  const tests = tested.map(({ of, window }) => {
    let inside = 0
    for (const share of window.inside) inside += share
    const count = Math.min(trips.length, Math.floor(inside + 1e-9))
    const outside = Math.max(1e-9, hours - window.insideHours)
    const test = poissonRateRatio([count, trips.length - count], [window.insideHours, outside], { confidence: 0.9 })
    // with no trip inside like hours cannot tell more than unlike ones
    const when = inside > 0 ? window.when : undefined
    const crossover = when === undefined || byWeekday === null ? null : stratified(byWeekday, when, trips)
    return {
      of,
      window,
      inside,
      trips: trips.length,
      expected: (trips.length * window.insideHours) / hours,
      ratio: test.ratio,
      low: test.low,
      high: test.high,
      p: test.pGreater,
      pFamily: paid.get(of) ?? null,
      byHour: when === undefined ? null : stratified(byHour, when, trips),
      crossover: crossover !== null && crossover.telling >= LEAST_TELLING ? crossover : null,
    }
  })
  const adjusted = holm(tests.map((t) => t.p))
  return tests.map((t, i) => ({ ...t, pAdjusted: adjusted[i]! }))
}

/** Every window that is a set of time, once; those spoken of first, so that none of them falls to the limit. */
function familiesOf(tested: readonly Tested[]): Family[] {
  const kept = new Set<Spans>()
  for (const { window } of tested) if (window.when !== undefined) kept.add(window.when.inside)
  for (const { family } of tested) {
    for (const { when } of family) if (when !== undefined && kept.size < MOST_WINDOWS) kept.add(when.inside)
  }
  return tested.flatMap(({ of, window, family }) => {
    const own = [window, ...family].flatMap(({ when }) =>
      when !== undefined && kept.has(when.inside) ? [when.inside] : [],
    )
    return own.length === 0 ? [] : [{ of, windows: [...new Set(own)] }]
  })
}
