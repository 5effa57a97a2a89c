import type { RateChange } from '../../contract/findings.ts'
import { poissonRateRatio } from '../../statistics/poisson-rate-ratio.ts'
import { measureWithin } from '../../timeline/spans.ts'
import type { Timeline, TimelineTrip } from '../../timeline/timeline.ts'
import { rounded } from '../words.ts'

const HOUR_MS = 3_600_000

/** Trips before and after an instant; those whose interval holds it are on neither side. */
export interface Sides {
  readonly before: readonly TimelineTrip[]
  readonly after: readonly TimelineTrip[]
  readonly across: readonly TimelineTrip[]
  /** Energised hours. */
  readonly hoursBefore: number
  readonly hoursAfter: number
}

/** Splits the trips of [from, to) at an instant. `trips` are those that count for a rate. */
export function sidesOf(
  timeline: Timeline,
  trips: readonly TimelineTrip[],
  from: number,
  at: number,
  to: number,
): Sides {
  const here = trips.filter((t) => (t.from >= from || t.to > from) && t.from < to)
  return {
    before: here.filter((t) => t.to <= at && t.from >= from),
    after: here.filter((t) => t.from >= at && t.to <= to),
    across: here.filter((t) => t.from < at && t.to > at),
    hoursBefore: measureWithin(timeline.energised, from, at) / HOUR_MS,
    hoursAfter: measureWithin(timeline.energised, at, to) / HOUR_MS,
  }
}

/** Rate after over rate before, with exact 90 % limits (Przyborowski & Wilenski 1940); null without time on both sides. */
export function rateChange({ before, after, hoursBefore, hoursAfter }: Sides): RateChange | null {
  if (!(hoursBefore > 0) || !(hoursAfter > 0)) return null
  const test = poissonRateRatio([after.length, before.length], [hoursAfter, hoursBefore], { confidence: 0.9 })
  const finite = (x: number | null): number | null => (x !== null && Number.isFinite(x) ? rounded(x) : null)
  return {
    tripsBefore: before.length,
    hoursBefore: rounded(hoursBefore),
    tripsAfter: after.length,
    hoursAfter: rounded(hoursAfter),
    ratio: finite(test.ratio),
    low: finite(test.low),
    high: finite(test.high),
    p: rounded(test.pLess),
  }
}
