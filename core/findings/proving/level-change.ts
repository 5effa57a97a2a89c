import tQuantile from '@stdlib/stats-base-dists-t-quantile'
import type { LevelChange } from '../../contract/findings.ts'
import { mannKendall } from '../../statistics/mann-kendall.ts'
import { median } from '../../statistics/median.ts'
import { seededRandom } from '../../statistics/random.ts'
import { theilSen } from '../../statistics/theil-sen.ts'
import { localClock } from '../../timeline/local-clock.ts'
import { lowerBound } from '../../timeline/series.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { medianInPlace, readingsWithin } from '../levels.ts'
import { rounded } from '../words.ts'

const HOUR_MS = 3_600_000
const DAY_MS = 24 * HOUR_MS
/** What lies farther from the remedy says little of the level round it. */
const MOST_DAYS = 14
/** On each side at least so many hours, on so many days. */
const LEAST_HOURS = 12
const LEAST_DAYS = 2
/** Fewer common hours of the day than this: all hours are compared as they are. */
const LEAST_COMMON = 6
/** A drift is taken off only when so many days before the remedy show one with this certainty. */
const DRIFT_DAYS = 6
const DRIFT_P = 0.05
const RESAMPLES = 299
const MOST_READINGS = 60

/** Median level of one hour. */
interface HourLevel {
  readonly at: number
  readonly day: number
  readonly hour: number
  readonly ma: number
}

/**
 * Standing leakage in the days before and after an instant: the median over the hours of the day of the difference of their medians, so
 * that neither habit nor the hour of the remedy moves it; a drift of the days before (Theil–Sen, where Mann and Kendall find one) is
 * carried on and taken off. 90 % limits by resampling whole days, for hours of one day resemble each other. Null without two days
 * of readings on both sides.
 *
 * @see Efron & Tibshirani (1993), An Introduction to the Bootstrap, chapters 8 (blocks) and 12 (t limits); Sen (1968)
 */
export function levelChange(timeline: Timeline, from: number, at: number, to: number): LevelChange | null {
  const before = hourLevels(timeline, Math.max(from, at - MOST_DAYS * DAY_MS), at)
  const after = hourLevels(timeline, at, Math.min(to, at + MOST_DAYS * DAY_MS))
  const days = [daysOf(before), daysOf(after)] as const
  if (Math.min(before.length, after.length) < LEAST_HOURS || Math.min(days[0].size, days[1].size) < LEAST_DAYS)
    return null
  const drift = driftOf(before)
  const level = (h: HourLevel): HourLevel => ({ ...h, ma: h.ma - ((drift ?? 0) * (h.at - at)) / DAY_MS })
  const [still, moved] = [byDay(before.map(level)), byDay(after.map(level))]
  const change = difference([...still.values()].flat(), [...moved.values()].flat())
  const random = seededRandom(`level ${before.length} ${after.length} ${rounded(change)}`)
  const again = (held: ReadonlyMap<number, readonly HourLevel[]>): HourLevel[] => {
    const keys = [...held.keys()]
    return keys.flatMap(() => held.get(random.pick(keys)) ?? [])
  }
  const draws = Float64Array.from({ length: RESAMPLES }, () => difference(again(still), again(moved)))
  const reach = tQuantile(0.95, days[0].size + days[1].size - 2) * deviation(draws)
  return {
    beforeMa: rounded(median(before.map((h) => h.ma))),
    afterMa: rounded(median(after.map((h) => h.ma))),
    changeMa: rounded(change),
    low: rounded(change - reach),
    high: rounded(change + reach),
    driftMaPerDay: drift === null ? null : rounded(drift),
    method:
      'medians of hours compared at the same hour of the day, drift before taken off (Theil–Sen, Mann–Kendall), limits by resampling whole days (Efron & Tibshirani 1993)',
  }
}

/** Medians of whole days, in order; what `levelChange` and the signs of a new cause look at. */
export function dayLevels(
  timeline: Timeline,
  from: number,
  to: number,
): { readonly at: number; readonly ma: number }[] {
  return [...byDay(hourLevels(timeline, from, to)).values()].map((hours) => ({
    at: median(hours.map((h) => h.at)),
    ma: median(hours.map((h) => h.ma)),
  }))
}

function hourLevels(timeline: Timeline, from: number, to: number): HourLevel[] {
  const { leakage, logged } = timeline
  if (leakage === null || !(from < to)) return []
  const clock = localClock(timeline.sheet.timeZone)
  const list: HourLevel[] = []
  for (let a = Math.floor(from / HOUR_MS) * HOUR_MS; a < to; a += HOUR_MS) {
    const [start, end] = [Math.max(a, from), Math.min(a + HOUR_MS, to)]
    // most hours of a long span may hold nothing: look before reading
    if (lowerBound(leakage.t, start) === lowerBound(leakage.t, end)) continue
    const { v } = readingsWithin(leakage, logged, start, end, MOST_READINGS)
    if (v.length === 0) continue
    list.push({
      at: (start + end) / 2,
      day: clock.dayNumber(start),
      hour: Math.floor(clock.minuteOfDay(start) / 60),
      ma: medianInPlace(v),
    })
  }
  return list
}

function daysOf(hours: readonly HourLevel[]): Set<number> {
  return new Set(hours.map((h) => h.day))
}

function byDay(hours: readonly HourLevel[]): Map<number, HourLevel[]> {
  const held = new Map<number, HourLevel[]>()
  for (const h of hours) {
    const list = held.get(h.day)
    if (list === undefined) held.set(h.day, [h])
    else list.push(h)
  }
  return held
}

function driftOf(hours: readonly HourLevel[]): number | null {
  const days = [...byDay(hours).values()].map((list) => ({
    at: median(list.map((h) => h.at)) / DAY_MS,
    ma: median(list.map((h) => h.ma)),
  }))
  if (days.length < DRIFT_DAYS) return null
  const levels = days.map((d) => d.ma)
  if (!(mannKendall(levels).p < DRIFT_P)) return null
  return theilSen(
    days.map((d) => d.at),
    levels,
  ).slope
}

/** Median over the hours of the day of the difference of medians; of all together where too few hours are common. */
function difference(before: readonly HourLevel[], after: readonly HourLevel[]): number {
  const [a, b] = [byHour(before), byHour(after)]
  const common: number[] = []
  for (const [hour, levels] of b) {
    const other = a.get(hour)
    if (other !== undefined) common.push(median(levels) - median(other))
  }
  if (common.length >= LEAST_COMMON) return median(common)
  return median(after.map((h) => h.ma)) - median(before.map((h) => h.ma))
}

function byHour(hours: readonly HourLevel[]): Map<number, number[]> {
  const held = new Map<number, number[]>()
  for (const { hour, ma } of hours) {
    const list = held.get(hour)
    if (list === undefined) held.set(hour, [ma])
    else list.push(ma)
  }
  return held
}

function deviation(x: Float64Array): number {
  const mean = x.reduce((sum, v) => sum + v, 0) / x.length
  return Math.sqrt(x.reduce((sum, v) => sum + (v - mean) ** 2, 0) / (x.length - 1))
}
