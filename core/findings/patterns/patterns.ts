import type { Pattern, Patterns } from '../../contract/findings.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { humidityPattern, temperaturePattern } from './air-pattern.ts'
import { clockPattern, clockTests } from './clock-pattern.ts'
import { hourlyLevel } from './level-of.ts'
import { levelPeriod } from './level-period.ts'
import type { LevelsOfPatterns } from './levels-of-patterns.ts'
import { loadPattern } from './load-pattern.ts'
import { type PatternTrips, patternTrips } from './pattern-trips.ts'
import { periodPattern } from './period-pattern.ts'
import { rainPattern } from './rain-pattern.ts'
import { sunPattern } from './sun-pattern.ts'
import { weekdayPattern } from './weekday-pattern.ts'

/**
 * When trips come, and what the leakage follows: time of day, weekday, period, sun, rain, temperature, humidity, load current
 * (methods.md §6, §7), each as one sentence with its test. Trips known only within half an hour or worse are left out; with fewer
 * than five the answer says so, and what the leakage alone shows is told all the same.
 */
export function patterns(
  timeline: Timeline,
  levels: LevelsOfPatterns = { minutes: null, remainder: null, followsCurrent: null },
): Patterns {
  const told = patternTrips(timeline)
  const level = hourlyLevel(timeline, levels.remainder)
  return {
    ...byTime(timeline, told),
    rain: rainPattern(timeline, told, level),
    temperature: temperaturePattern(timeline, told, level),
    humidity: humidityPattern(timeline, told, level),
    load: loadPattern(timeline, told, levels),
    level: levelPeriod(level),
    timedSteps: [],
  }
}

function byTime(
  timeline: Timeline,
  { trips, tooFew }: PatternTrips,
): Record<'clock' | 'weekday' | 'period' | 'sun', Pattern> {
  if (trips === null) {
    const { latitude, longitude } = timeline.sheet
    const isPlaced = latitude !== undefined && longitude !== undefined
    const sun = isPlaced ? tooFew : { verdict: 'The sheet has no latitude and longitude.', p: null }
    return { clock: tooFew, weekday: tooFew, period: tooFew, sun }
  }
  const tests = clockTests(timeline, trips)
  return {
    clock: clockPattern(tests, trips),
    weekday: weekdayPattern(timeline, trips),
    period: periodPattern(timeline, trips),
    sun: sunPattern(timeline, trips, tests),
  }
}
