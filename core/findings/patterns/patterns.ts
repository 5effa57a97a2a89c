import type { Pattern, Patterns } from '../../contract/findings.ts'
import { totalMs } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { episodes } from '../episodes.ts'
import { humidityPattern, temperaturePattern } from './air-pattern.ts'
import { clockPattern, clockTests } from './clock-pattern.ts'
import { hourlyLevel } from './level-of.ts'
import { levelPeriod } from './level-period.ts'
import type { LevelsOfPatterns } from './levels-of-patterns.ts'
import { loadPattern } from './load-pattern.ts'
import { periodPattern } from './period-pattern.ts'
import { rainPattern } from './rain-pattern.ts'
import { sunPattern } from './sun-pattern.ts'
import { TOO_FEW } from './too-few.ts'
import { weekdayPattern } from './weekday-pattern.ts'

const MINUTE_MS = 60_000
/** Fewer trips with a known time cannot show a pattern. */
const LEAST_TRIPS = 5
/** A trip known no closer than this has no time of day. */
const VAGUE_MS = 30 * MINUTE_MS

/**
 * When trips come, and what the leakage follows: time of day, weekday, period, sun, rain, temperature, humidity, load current
 * (methods.md §6, §7), each as one sentence with its test. Trips known only within half an hour or worse are left out; with fewer
 * than five the answer says so, and what the leakage alone shows is told all the same.
 */
export function patterns(
  timeline: Timeline,
  levels: LevelsOfPatterns = { minutes: null, remainder: null, followsCurrent: null },
): Patterns {
  const known = episodes(timeline.trips)
    .filter((trip) => trip.to - trip.from <= VAGUE_MS)
    .map((trip) => (trip.from + trip.to) / 2)
  const trips = known.length >= LEAST_TRIPS && totalMs(timeline.energised) > 0 ? known : null
  const level = hourlyLevel(timeline, levels.remainder)
  return {
    ...byTime(timeline, trips),
    rain: rainPattern(timeline, trips, level),
    temperature: temperaturePattern(timeline, trips, level),
    humidity: humidityPattern(timeline, trips, level),
    load: loadPattern(timeline, trips, levels),
    level: levelPeriod(level),
    timedSteps: [],
  }
}

function byTime(
  timeline: Timeline,
  trips: readonly number[] | null,
): Record<'clock' | 'weekday' | 'period' | 'sun', Pattern> {
  if (trips === null) {
    const { latitude, longitude } = timeline.sheet
    const isPlaced = latitude !== undefined && longitude !== undefined
    const sun = isPlaced ? TOO_FEW : { verdict: 'The sheet has no latitude and longitude.', p: null }
    return { clock: TOO_FEW, weekday: TOO_FEW, period: TOO_FEW, sun }
  }
  const tests = clockTests(timeline, trips)
  return {
    clock: clockPattern(tests, trips),
    weekday: weekdayPattern(timeline, trips),
    period: periodPattern(timeline, trips),
    sun: sunPattern(timeline, trips, tests),
  }
}
