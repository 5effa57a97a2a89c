import { mad, median } from '../../statistics/index.ts'
import { type Series, usualInterval } from '../../timeline/series.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { type Hourly, hourly, withoutDrift } from './hourly.ts'

const MINUTE_MS = 60_000
/** What changes over more hours than this on both sides is drift or season, no response. */
export const DRIFT_HOURS = 120
const LEAST_HOURS = 48

/** An hour with fewer minutes than this is what follows a trip, when nothing is as the states say. */
const LEAST_MINUTES = 20
/** Hours farther than so many robust deviations from the rest count as just so far. */
const FARTHEST = 8

/** Hourly medians of a level of minutes, without slow drift and wild hours; null with under two days of them. */
export function hourlyLevel(timeline: Timeline, minutes: Series | null): Hourly | null {
  if (minutes === null || minutes.t.length === 0) return null
  const perHour = Math.min(LEAST_MINUTES, (20 * MINUTE_MS) / Math.max(MINUTE_MS, usualInterval(minutes)))
  const level = tamed(withoutDrift(hourly(minutes, timeline.from, timeline.to, perHour), DRIFT_HOURS))
  return level.v.filter(Number.isFinite).length * level.step < LEAST_HOURS ? null : level
}

function tamed(level: Hourly): Hourly {
  const known = level.v.filter(Number.isFinite)
  if (known.length === 0) return level
  const [middle, reach] = [median(known), FARTHEST * mad(known)]
  if (reach === 0) return level
  return { ...level, v: level.v.map((x) => Math.max(middle - reach, Math.min(middle + reach, x))) }
}
