import type { Pattern } from '../../contract/findings.ts'
import type { Series } from '../../timeline/series.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { heldAbove } from '../windows/held.ts'
import { antecedent } from '../windows/weather-windows.ts'
import { figure } from '../words.ts'
import { sensible } from './channel-sense.ts'
import { type Hourly, hourlySums, standingRain } from './hourly.ts'
import { type LevelResponse, levelResponse } from './level-response.ts'
import { coincidence, onsets } from './onsets.ts'
import type { PatternTrips } from './pattern-trips.ts'
import { type Preferred, ratePattern } from './rate-pattern.ts'
import { isResponse, withLevel } from './with-level.ts'

const HOUR_MS = 3_600_000
/** Wet: so many mm of rain still standing, drying by half in so many hours, felt so much later. */
const WET_MM = 1
const HALF_LIVES = [3, 12] as const
const LAGS = [0, 6] as const
/** Half-lives of drying that the leakage may choose from, h. */
const DRYINGS = [1, 2, 4, 8, 16, 32] as const
/** What is wet through gets no wetter: so many mm soak it by two thirds. */
const SOAKED_MM = 4
const SPOKEN_MM = 10
/** A spell of rain begins with this much in a reading, mm. */
const RAIN_MM = 0.2
const QUIET_HOURS = 6
/** Windows after its beginning, and how late they open, h. */
const WINDOWS = [3, 6, 12, 24].flatMap((window) => [0, 6].map((lag) => ({ window, lag })))

/**
 * Do trips come when it is wet, and does the leakage follow the rain: antecedent precipitation (Kohler & Linsley 1951), its decay and lag
 * chosen by how well it foretells the level in hours held out. Where the level follows, its law alone says what is wet; else
 * four laws are tried and paid for. `level` is what no named thing accounts for.
 */
export function rainPattern(timeline: Timeline, { trips, tooFew }: PatternTrips, level: Hourly | null): Pattern {
  const { series: rain, refused } = sensible(timeline.rain, { name: 'rain', low: 0, high: 300 })
  if (rain === null) return { verdict: refused === 'The rain did not change.' ? dry(timeline) : refused, p: null }
  const response = level === null ? null : ofLevel(timeline, rain, level)
  const driver = { words: '10 mm of rain still standing', spell: 'rain' }
  if (trips === null) return withLevel(tooFew, null, response, driver)
  const laws = isResponse(response)
    ? [{ halfLife: response.halfLife!, lag: response.lag }]
    : HALF_LIVES.flatMap((halfLife) => LAGS.map((lag) => ({ halfLife, lag })))
  const sets = laws.map(({ halfLife, lag }): Preferred => {
    const { inside, known } = heldAbove(antecedent(rain, halfLife), WET_MM, true, lag * HOUR_MS)
    const late = lag === 0 ? '' : `, ${figure(lag)} hours late`
    return { words: `in wet hours (drying by half in ${halfLife} h${late})`, inside, known }
  })
  const rates = ratePattern(timeline.energised, trips, sets, 'No wet and dry hours to compare.')
  const spells = onsets(rain, (mm) => mm >= RAIN_MM, QUIET_HOURS)
  return withLevel(rates, coincidence(timeline, trips, spells, WINDOWS), response, driver)
}

function ofLevel(timeline: Timeline, rain: Series, level: Hourly): LevelResponse | null {
  const fallen = hourlySums(rain, timeline.from, timeline.to)
  return levelResponse(
    level,
    DRYINGS.flatMap((halfLife) => {
      const driver = standingRain(fallen, halfLife)
      const soaked = { ...driver, v: driver.v.map((mm) => 1 - Math.exp(-mm / SOAKED_MM)) }
      return [
        { halfLife, driver, amount: SPOKEN_MM },
        { halfLife, driver: soaked, amount: 1 - Math.exp(-SPOKEN_MM / SOAKED_MM) },
      ]
    }),
  )
}

function dry({ rain }: Timeline): string {
  return (rain?.v[0] ?? 0) > 0 ? 'The rain read did not change: check its channel.' : 'It did not rain.'
}
