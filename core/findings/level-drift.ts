import normalCdf from '@stdlib/stats-base-dists-normal-cdf'
import type { Headroom } from '../contract/findings.ts'
import { mannKendall, theilSen } from '../statistics/index.ts'
import { sliceSeries } from '../timeline/series.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { medianInPlace, readingsWithin } from './levels.ts'
import { resemblance } from './resemblance.ts'
import { rounded } from './words.ts'

const HOUR_MS = 3_600_000
const LEAST_HOURS = 24
/** Stretches are made longer rather than more than this many. */
const MOST_STRETCHES = 400
/** How far back one stretch may resemble another: a day of hours. */
const MOST_LAGS = 24

/**
 * Slow drift of the level: Theil–Sen slope of hourly medians with the Mann–Kendall test. Hours resemble their neighbours,
 * so that test and limits are widened by the number of hours that count as one (Yue & Wang 2004). 90 % limits. Null
 * below 24 logged hours.
 *
 * @see Sen (1968), J. Amer. Statist. Assoc. 63, 1379-1389
 * @see Yue & Wang (2004), Water Resources Management 18, 201-218
 */
export function levelDrift(timeline: Timeline): NonNullable<Headroom['drift']> | null {
  const { t, v } = hourlyLevels(timeline)
  if (t.length < LEAST_HOURS) return null
  const days = t.map((ms) => (ms - t[0]!) / (24 * HOUR_MS))
  const trend = theilSen(days, v, { confidence: 0.9 })
  if (trend.low === null || trend.high === null) return { maPerDay: 0, low: 0, high: 0, p: 1 }
  const test = mannKendall(v)
  const wider = Math.sqrt(
    resemblance(
      v.map((level, i) => level - trend.slope * days[i]!),
      MOST_LAGS,
    ),
  )
  return {
    maPerDay: rounded(trend.slope),
    low: rounded(trend.slope + (trend.low - trend.slope) * wider),
    high: rounded(trend.slope + (trend.high - trend.slope) * wider),
    p: rounded(Math.min(1, 2 * normalCdf(-Math.abs(test.z) / wider, 0, 1))),
  }
}

function hourlyLevels(timeline: Timeline): { t: number[]; v: number[] } {
  const t: number[] = []
  const v: number[] = []
  if (timeline.leakage === null) return { t, v }
  const hours = Math.max(1, Math.ceil((timeline.to - timeline.from) / HOUR_MS / MOST_STRETCHES))
  for (let from = timeline.from; from < timeline.to; from += hours * HOUR_MS) {
    const to = Math.min(timeline.to, from + hours * HOUR_MS)
    const held = readingsWithin(sliceSeries(timeline.leakage, from, to), timeline.logged, from, to, 120)
    if (held.v.length === 0) continue
    t.push((from + to) / 2)
    v.push(medianInPlace(held.v))
  }
  return { t, v }
}
