import type { Pattern } from '../../contract/findings.ts'
import { quantile } from '../../statistics/quantile.ts'
import type { Series } from '../../timeline/series.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { heldAbove, thinned } from '../windows/held.ts'
import { figure } from '../words.ts'
import { sensible } from './channel-sense.ts'
import { dewPoints } from './dew-point.ts'
import { type Hourly, hourly, withoutDaily, withoutDrift } from './hourly.ts'
import { DRIFT_HOURS } from './level-of.ts'
import { type LevelResponse, levelResponse } from './level-response.ts'
import { coincidence, onsets } from './onsets.ts'
import type { PatternTrips } from './pattern-trips.ts'
import { ratePatternByHour } from './rate-by-hour.ts'
import type { Preferred } from './rate-pattern.ts'
import { withLevel } from './with-level.ts'

/** Air this near its dew point wets what is colder, K. */
const NEAR_DEW = 2
/** Spells of air are told by whole days, for each day has its own cold and damp hours. */
const QUIET_HOURS = 24
const WINDOWS = [24, 48].map((window) => ({ window, lag: 0 }))

/** Do trips prefer cold or warm hours, and does the leakage follow the temperature. */
export function temperaturePattern(timeline: Timeline, { trips, tooFew }: PatternTrips, level: Hourly | null): Pattern {
  const { series, refused } = sensible(timeline.temperature, { name: 'temperature', low: -60, high: 70 })
  if (series === null) return { verdict: refused, p: null }
  const response = follows(timeline, level, series, 5)
  const driver = { words: '5 °C more', spell: 'a cold spell' }
  if (trips === null) return withLevel(tooFew, null, response, driver)
  const cold = cutOf(series, 0.25)
  const rates = ratePatternByHour(
    timeline,
    trips,
    [preferred(series, cold, false, '°C', 'it was'), preferred(series, cutOf(series, 0.75), true, '°C', 'it was')],
    'The temperature did not change enough to compare.',
  )
  const spells = onsets(series, (v) => v < cold, QUIET_HOURS)
  return withLevel(rates, coincidence(timeline, trips, spells, WINDOWS), response, driver)
}

/**
 * Do trips prefer damp air: high relative humidity, a high dew point, or air near its dew point (Magnus formula, Alduchov &
 * Eskridge 1996; both need a temperature too); and does the leakage follow the humidity.
 */
export function humidityPattern(timeline: Timeline, { trips, tooFew }: PatternTrips, level: Hourly | null): Pattern {
  const { series: humidity, refused } = sensible(timeline.humidity, { name: 'humidity', low: 0, high: 105 })
  if (humidity === null) return { verdict: refused, p: null }
  const temperature = sensible(timeline.temperature, { name: 'temperature', low: -60, high: 70 }).series
  const dew = temperature === null ? null : dewPoints(temperature, humidity)
  const response = follows(timeline, level, humidity, 10)
  const driver = { words: '10 % more humidity', spell: 'a damp spell' }
  if (trips === null) return withLevel(tooFew, null, response, driver)
  const damp = cutOf(humidity, 0.9)
  const sets = [
    preferred(humidity, cutOf(humidity, 0.75), true, '% of humidity', 'there was'),
    preferred(humidity, damp, true, '% of humidity', 'there was'),
  ]
  if (temperature !== null && dew !== null && dew.t.length > 20) {
    sets.push(preferred(dew, cutOf(dew, 0.75), true, '°C', 'the dew point was'))
    const { inside, known } = heldAbove(spreadOf(temperature, dew), NEAR_DEW, false, 0)
    sets.push({ words: `while the air was within ${NEAR_DEW} K of its dew point`, inside, known })
  }
  const rates = ratePatternByHour(timeline, trips, sets, 'The humidity did not change enough to compare.')
  const spells = onsets(humidity, (v) => v > damp, QUIET_HOURS)
  return withLevel(rates, coincidence(timeline, trips, spells, WINDOWS), response, driver)
}

function follows(timeline: Timeline, level: Hourly | null, series: Series, amount: number): LevelResponse | null {
  if (level === null) return null
  // warm hours and busy hours are the same hours: only what differs from day to day tells
  const driver = withoutDaily(withoutDrift(hourly(series, timeline.from, timeline.to), DRIFT_HOURS))
  return levelResponse(withoutDaily(level), [{ halfLife: null, driver, amount }])
}

function cutOf(series: Series, share: number): number {
  return quantile(thinned(series.v, 5_000), share)
}

/** The hours above or below a cut, in words. */
export function preferred(series: Series, cut: number, above: boolean, unit: string, was: string): Preferred {
  const { inside, known } = heldAbove(series, cut, above, 0)
  return { words: `while ${was} ${above ? 'above' : 'below'} ${figure(cut)} ${unit}`, inside, known }
}

/** Temperature less dew point at the times of the dew point. */
function spreadOf(temperature: Series, dew: Series): Series {
  let k = 0
  const v = Float64Array.from(dew.t, (t, i) => {
    while (k + 1 < temperature.t.length && temperature.t[k + 1]! <= t) k++
    return temperature.v[k]! - dew.v[i]!
  })
  return { t: dew.t, v }
}
