import { binomialUpperTail } from '../../statistics/binomial.ts'
import { quantile } from '../../statistics/quantile.ts'
import { isDaily } from '../windows/clock-windows.ts'
import { LEAST_STARTS } from './gathering.ts'
import { periodCandidates } from './period-candidates.ts'
import type { RaisedRun } from './raised-runs.ts'
import type { Kept, RunClock } from './run-clock.ts'
import type { PeriodSchedule } from './schedule.ts'

const HOUR_MS = 3_600_000
const LONGEST = 240
const LEAST_TURNS = 4
/** Share of a period within which the distance of two starts is that period. */
const TOLERANCE = 0.01
/** Distances between these shares of a period tell how many would come so near it by chance. */
const ROUND = [0.8, 1.25] as const
/** Least share of the distances that are the period, or twice or three times it. */
const LEAST_KEPT = 0.6
const MOST_MISSED = 3
/** Different periods from an hour to ten days, at that tolerance, with their neighbours. */
const TRIED = (1.5 * Math.log(LONGEST)) / (2 * TOLERANCE)

/**
 * A fixed distance from start to start, however often the count began anew: a timer that loses its count when the supply is
 * cut keeps no comb over the whole span. The number of neighbouring starts that lie one period apart, on the clock of supply, against the
 * binomial tail under the density of distances round it (a renewal process: Cox 1962), all periods paid for. A thermostat's
 * distances spread too far for it.
 */
export function renewedPeriod(runs: readonly RaisedRun[], clock: RunClock): Kept<PeriodSchedule> | null {
  if (runs.length < LEAST_STARTS + 1) return null
  const { of } = clock.hours.supply
  const hours = Float64Array.from(runs, ({ from }) => of(from))
  const gaps = hours.slice(1).map((x, i) => x - hours[i]!)
  const span = of(clock.timeline.to)
  let best: Kept<PeriodSchedule> | null = null
  for (const first of periodCandidates(hours, span / LEAST_TURNS)) {
    const near = gaps.filter((gap) => Math.abs(gap / first - 1) < 0.03)
    if (near.length < LEAST_STARTS) continue
    const period = quantile(near, 0.5)
    if (period < 1 || isDaily(period, span)) continue
    const found = tested(runs, hours, gaps, period, clock)
    if (found !== null && (best === null || found.schedule.p < best.schedule.p)) best = found
  }
  return best
}

function tested(
  runs: readonly RaisedRun[],
  hours: Float64Array,
  gaps: Float64Array,
  period: number,
  clock: RunClock,
): Kept<PeriodSchedule> | null {
  const within = Math.max(TOLERANCE * period, (1.5 * clock.stepMs) / HOUR_MS)
  const off = (gap: number): number => {
    const turns = Math.round(gap / period)
    return turns < 1 || turns > MOST_MISSED ? Number.POSITIVE_INFINITY : Math.abs(gap - turns * period)
  }
  const hits = gaps.filter((gap) => Math.abs(gap - period) <= within).length
  const kept = gaps.filter((gap) => off(gap) <= within).length / gaps.length
  if (hits < LEAST_STARTS || kept < LEAST_KEPT) return null
  const round = gaps.filter((gap) => gap > ROUND[0] * period && gap < ROUND[1] * period).length - hits
  const chance = Math.min(0.5, ((round + 1) * 2 * within) / ((ROUND[1] - ROUND[0]) * period) / gaps.length)
  const p = Math.min(1, TRIED * binomialUpperTail(hits, gaps.length, chance, 1 - chance))
  const isMember = runs.map((_, i) => off(gaps[i - 1] ?? Number.NaN) <= within || off(gaps[i] ?? Number.NaN) <= within)
  const begunAnew: number[] = []
  runs.forEach((_, i) => {
    if (isMember[i] && !(off(gaps[i - 1] ?? Number.NaN) <= within)) begunAnew.push(hours[i]!)
  })
  const away = [...gaps].map(off).filter((hour) => hour <= within)
  const schedule: PeriodSchedule = {
    kind: 'period',
    hours: period,
    on: 'supply',
    phaseHours: begunAnew.at(-1)!,
    begunAnew,
    spreadMinutes: Math.max(1, clock.stepMs / 120_000, 60 * quantile(away, 0.9)),
    kept,
    p,
  }
  return { schedule, members: runs.filter((_, i) => isMember[i]) }
}
