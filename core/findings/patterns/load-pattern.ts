import type { Pattern } from '../../contract/findings.ts'
import { laggedCorrelation } from '../../statistics/correlation.ts'
import { quantile } from '../../statistics/quantile.ts'
import { theilSen } from '../../statistics/theil-sen.ts'
import { lowerBound, type Series } from '../../timeline/series.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { minuteLevels } from '../minute-levels.ts'
import { thinned } from '../windows/held.ts'
import { figure, rounded } from '../words.ts'
import { preferred } from './air-pattern.ts'
import { sensible } from './channel-sense.ts'
import { currentChanges } from './current-changes.ts'
import type { LevelsOfPatterns } from './levels-of-patterns.ts'
import type { PatternTrips } from './pattern-trips.ts'
import { ratePatternByHour } from './rate-by-hour.ts'

const MINUTE_MS = 60_000
/** So few changes of the current do not tell, so many are enough. */
const LEAST_CHANGES = 12
const MOST_CHANGES = 400

/**
 * Does the leakage follow the group's load current (the mark of a neutral–earth fault): Theil–Sen slope of its five-minute
 * changes on those of the current, across all switching, and whether one law holds for every load (`followsCurrent`); and do trips prefer heavy load: rates above two quantiles of the
 * current, the current before trips beside that of the rest.
 */
export function loadPattern(timeline: Timeline, { trips, tooFew }: PatternTrips, levels: LevelsOfPatterns): Pattern {
  const name = 'load current of the group'
  const { series, refused } = sensible(timeline.loadCurrent, { name, low: 0, high: 10_000 })
  if (series === null) return { verdict: refused, p: null }
  const amps = minuteLevels(series)
  const slope = levels.minutes === null ? null : slopeOf(levels.minutes, amps)
  const said = slope === null ? '' : slopeWords(slope, levels.followsCurrent)
  const figures = slope === null ? {} : slopeFigures(slope)
  if (trips === null) return { ...tooFew, verdict: `${tooFew.verdict}${said}`, ...figures }
  const sample = thinned(series.v, 5_000)
  const sets = [0.75, 0.9].map((share) =>
    preferred(series, quantile(sample, share), true, 'A', 'the load current of the group was'),
  )
  const rates = ratePatternByHour(timeline, trips, sets, `The ${name} did not change enough to compare.`)
  return { ...rates, verdict: `${rates.verdict}${said}`, ...atTrips(amps, trips, sample), ...figures }
}

interface Slope {
  readonly maPerA: number
  readonly low: number
  readonly high: number
  readonly correlation: number
  readonly changes: number
}

function slopeOf(minutes: Series, amps: Series): Slope | null {
  const changes = currentChanges(minutes, amps)
  if (changes.amps.length < LEAST_CHANGES) return null
  const [x, y] = [thinned(changes.amps, MOST_CHANGES), thinned(changes.ma, MOST_CHANGES)]
  const line = theilSen(x, y, { confidence: 0.9 })
  const correlation = laggedCorrelation(changes.amps, changes.ma, 0)
  if (line.low === null || line.high === null || correlation === null) return null
  return { maPerA: line.slope, low: line.low, high: line.high, correlation, changes: changes.amps.length }
}

function slopeWords({ maPerA, low, high }: Slope, followsCurrent: boolean | null): string {
  if (low <= 0) return ' The leakage does not rise with the load current.'
  const slope = `${figure(maPerA)} mA for each ampere (${figure(low)} to ${figure(high)})`
  return followsCurrent === true
    ? ` The leakage follows it, whatever is switched: ${slope}, as with neutral and earth touching.`
    : ` The leakage rises by ${slope}, but single loads explain that as well.`
}

function slopeFigures({ maPerA, low, high, correlation, changes }: Slope): Record<string, number> {
  return {
    maPerA: rounded(maPerA),
    maPerALow: rounded(low),
    maPerAHigh: rounded(high),
    changesCorrelation: rounded(correlation),
    changes,
  }
}

/** Median current in the last minute before a trip, and of all readings. */
function atTrips(amps: Series, trips: readonly number[], all: Float64Array): Record<string, number> {
  const seen = trips.flatMap((t) => {
    const i = lowerBound(amps.t, t - MINUTE_MS + 1) - 1
    return i >= 0 && t - amps.t[i]! < 10 * MINUTE_MS ? [amps.v[i]!] : []
  })
  if (seen.length === 0) return {}
  return { ampsAtTrips: rounded(quantile(seen, 0.5)), ampsUsual: rounded(quantile(all, 0.5)) }
}
