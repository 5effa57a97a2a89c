import { binomialUpperTail } from '../../statistics/binomial.ts'
import { isDaily } from '../windows/clock-windows.ts'
import { dueStarts } from './due-starts.ts'
import { LEAST_STARTS } from './gathering.ts'
import { BIN, periodCandidates } from './period-candidates.ts'
import type { RaisedRun } from './raised-runs.ts'
import { renewedPeriod } from './renewed-period.ts'
import type { Kept, RunClock } from './run-clock.ts'
import type { PeriodSchedule } from './schedule.ts'

const HOUR_MS = 3_600_000
const SHORTEST = 1
const LONGEST = 240
/** A period must turn so often within the span. */
const LEAST_TURNS = 4
/** Share of a turn within which a start keeps the period, and at most so many hours: a timer is no tide. */
const TOLERANCES = [0.02, 0.05, 0.1] as const
const WIDEST = 0.25
/** Share of the starts due that came; half as long a period would keep half of them. */
const LEAST_KEPT = 0.55
/** Frequencies that differ by a tenth of a turn over the span count as tried, all down to an hour. */
const OVERSAMPLE = 10
/** Most places at which phases are summed to make a period exact. */
const MOST_STARTS = 400
/** Hours without supply that part a timer which stands still from the clock on the wall. */
const PARTING_OUTAGE = 0.5

/**
 * The fixed period that runs keep best, on the wall's clock and on one that stands still while the device is open: candidates from the
 * distances of starts, made exact by the greatest resultant near them and a straight line through the starts, tested by the
 * binomial tail of starts on the comb, every frequency of the range paid for.
 *
 * @see Mardia & Jupp (2000), section 6.3 (resultants); Clopper & Pearson's tail as in binomialUpperTail
 */
export function periodSchedule(runs: readonly RaisedRun[], clock: RunClock): Kept<PeriodSchedule> | null {
  if (runs.length < LEAST_STARTS) return null
  let best: Kept<PeriodSchedule> | null = null
  for (const on of ['wall', 'supply'] as const) {
    if (on === 'supply' && clock.outageHours < 1 / 60) continue
    const { of } = clock.hours[on]
    const hours = Float64Array.from(runs, ({ from }) => of(from))
    const span = of(clock.timeline.to)
    for (const first of periodCandidates(hours, span / LEAST_TURNS)) {
      const comb = exact(hours, first, span)
      if (comb === null) continue
      const mayBeDaily = on === 'supply' && clock.outageHours > PARTING_OUTAGE
      if (!mayBeDaily && isDaily(comb.period, span)) continue
      const found = tested(runs, hours, comb, on, clock, span)
      if (found !== null && (best === null || found.schedule.p < best.schedule.p)) best = found
    }
  }
  return best ?? renewedPeriod(runs, clock)
}

interface Comb {
  readonly period: number
  readonly phase: number
}

/** The comb near a period: greatest resultant on a fine grid, then a line through the starts on it. */
function exact(hours: Float64Array, first: number, span: number): Comb | null {
  const stride = Math.max(1, Math.ceil(hours.length / MOST_STARTS))
  const step = 1 / (OVERSAMPLE * span)
  const reach = Math.max(1, Math.ceil((2 * BIN) / first / step))
  const lowest = Math.max(step, 1 / first - reach * step)
  const cos = new Float64Array(2 * reach + 1)
  const sin = new Float64Array(2 * reach + 1)
  for (let i = 0; i < hours.length; i += stride) {
    // the angle at each frequency is turned on from the one before
    let x = Math.cos(2 * Math.PI * lowest * hours[i]!)
    let y = Math.sin(2 * Math.PI * lowest * hours[i]!)
    const turnX = Math.cos(2 * Math.PI * step * hours[i]!)
    const turnY = Math.sin(2 * Math.PI * step * hours[i]!)
    for (let k = 0; k < cos.length; k++) {
      cos[k]! += x
      sin[k]! += y
      const next = x * turnX - y * turnY
      y = x * turnY + y * turnX
      x = next
    }
  }
  let most = 0
  for (let k = 1; k < cos.length; k++) if (Math.hypot(cos[k]!, sin[k]!) > Math.hypot(cos[most]!, sin[most]!)) most = k
  const frequency = lowest + most * step
  let comb: Comb = { period: 1 / frequency, phase: Math.atan2(sin[most]!, cos[most]!) / (2 * Math.PI * frequency) }
  for (let round = 0; round < 2; round++) {
    const line = throughStarts(hours, comb)
    if (line === null) return null
    comb = line
  }
  return comb
}

function throughStarts(hours: Float64Array, { period, phase }: Comb): Comb | null {
  let [n, sk, sx, skk, skx] = [0, 0, 0, 0, 0]
  for (const x of hours) {
    const k = Math.round((x - phase) / period)
    if (Math.abs(x - phase - k * period) > 0.1 * period) continue
    n++
    sk += k
    sx += x
    skk += k * k
    skx += k * x
  }
  const spread = n * skk - sk * sk
  if (n < LEAST_STARTS || spread <= 0) return null
  const slope = (n * skx - sk * sx) / spread
  return { period: slope, phase: (sx - slope * sk) / n }
}

function tested(
  runs: readonly RaisedRun[],
  hours: Float64Array,
  { period, phase }: Comb,
  on: 'wall' | 'supply',
  clock: RunClock,
  span: number,
): Kept<PeriodSchedule> | null {
  if (!(period >= SHORTEST)) return null
  const tried = 2 * TOLERANCES.length * OVERSAMPLE * span * (1 / SHORTEST - 1 / LONGEST)
  const away = hours.map((x) => Math.abs(x - phase - Math.round((x - phase) / period) * period))
  let p = 1
  let tolerance = 0
  for (const share of TOLERANCES) {
    const within = Math.max(Math.min(WIDEST, share * period), (1.5 * clock.stepMs) / HOUR_MS)
    const chance = Math.min(0.5, (2 * within) / period)
    const hits = away.filter((x) => x <= within).length
    const here = tried * binomialUpperTail(hits, hours.length, chance, 1 - chance)
    if (here >= p) continue
    p = here
    tolerance = within
  }
  if (p >= 1) return null
  const first = Math.ceil((hours[0]! - phase) / period - 0.5)
  const last = Math.floor((hours.at(-1)! - phase) / period + 0.5)
  const due = Float64Array.from({ length: last - first + 1 }, (_, i) =>
    clock.hours[on].instant(phase + (first + i) * period),
  )
  const fit = dueStarts(runs, due, tolerance * HOUR_MS, clock)
  if (fit === null || fit.members.length < LEAST_STARTS) return null
  const kept = fit.came.filter((yes) => yes).length / fit.came.length
  if (kept < LEAST_KEPT) return null
  const start = phase + first * period + fit.offsetMinutes / 60
  const schedule: PeriodSchedule = {
    kind: 'period',
    hours: period,
    on,
    phaseHours: ((start % period) + period) % period,
    spreadMinutes: fit.spreadMinutes,
    kept,
    p,
  }
  return { schedule, members: fit.members }
}
