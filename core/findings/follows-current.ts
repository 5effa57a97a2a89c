import type { BudgetLine } from '../contract/findings.ts'
import { laggedCorrelation } from '../statistics/correlation.ts'
import { quantile } from '../statistics/quantile.ts'
import { lowerBound, type Series } from '../timeline/series.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import { minuteLevels } from './minute-levels.ts'

const MINUTE_MS = 60_000
/** Things that must have stepped in both leakage and load current for a verdict. */
const LEAST_THINGS = 4
const LEAST_STEPS = 2
const MOST_STEPS = 200

/** Changes over so many minutes, of at least so many amperes, are compared; so many of them make a verdict. */
const APART_MINUTES = 5
const LEAST_AMPS = 1
const LEAST_CHANGES = 30
/** Correlation of the changes that decides alone, and the least that may go with a law that foretells. */
const PLAIN = 0.92
const ALONGSIDE = 0.8

/**
 * Whether leakage follows the load current of the group whichever load carries it: the mark of a neutral–earth fault
 * (domain.md). A conductive share k of the current I on a standing level B reads √(B² + (kI)²), a rise that grows
 * faster than the current; k is fitted on all things but the one with the largest rise, and must then foretell that
 * one. Beside it the five-minute changes of both must go together, or do so almost perfectly. True or false, null
 * where the log cannot tell.
 */
export function followsCurrent(timeline: Timeline, minutes: Series, budget: readonly BudgetLine[]): boolean | null {
  const { loadCurrent } = timeline
  if (loadCurrent === null || minutes.t.length === 0) return null
  const together = changesTogether(minutes, loadCurrent)
  if (together !== null && together >= PLAIN) return true
  if (together !== null && together < ALONGSIDE) return false
  const standing = quantile(minutes.v, 0.25)
  const steps: { readonly amps: number; readonly ma: number }[] = []
  for (const thing of timeline.things) {
    const line = budget.find((b) => b.of === thing.of && b.basis === 'switching')
    const amps = stepOf(loadCurrent, thing)
    if (line?.ma === null || line?.ma === undefined || amps === null || amps <= 0.05) continue
    steps.push({ amps, ma: Math.max(0, line.ma) })
  }
  if (steps.length < LEAST_THINGS) return null
  steps.sort((a, b) => b.ma - a.ma)
  const [largest, ...others] = steps as [(typeof steps)[number], ...typeof steps]
  if (largest.ma < 0.5) return false
  const rise = (k: number, amps: number): number => Math.hypot(standing, k * amps) - standing
  let best = { k: 0, miss: Number.POSITIVE_INFINITY }
  for (let log = -3; log <= 2; log += 0.02) {
    const k = 10 ** log
    let miss = 0
    for (const { amps, ma } of others) miss += (rise(k, amps) - ma) ** 2
    if (miss < best.miss) best = { k, miss }
  }
  const total = others.reduce((sum, s) => sum + s.ma ** 2, 0)
  const foretold = rise(best.k, largest.amps)
  return best.miss <= 0.5 * total && foretold >= 0.4 * largest.ma && foretold <= 2.5 * largest.ma
}

/** Pearson correlation of the changes of leakage and load current over five minutes; null with too few. */
function changesTogether(minutes: Series, loadCurrent: Series): number | null {
  const amps = new Map<number, number>()
  const current = minuteLevels(loadCurrent)
  current.t.forEach((t, i) => {
    amps.set(t, current.v[i]!)
  })
  const xs: number[] = []
  const ys: number[] = []
  for (let i = APART_MINUTES; i < minutes.t.length; i += APART_MINUTES) {
    const [now, then] = [minutes.t[i]!, minutes.t[i - APART_MINUTES]!]
    const change = (amps.get(now) ?? Number.NaN) - (amps.get(then) ?? Number.NaN)
    if (!(Math.abs(change) >= LEAST_AMPS) || now - then > 3 * APART_MINUTES * MINUTE_MS) continue
    xs.push(change)
    ys.push(minutes.v[i]! - minutes.v[i - APART_MINUTES]!)
  }
  return xs.length < LEAST_CHANGES ? null : laggedCorrelation(xs, ys, 0)
}

/** Median step of a series when the thing is switched, its sign turned for switching off; null with too few. */
function stepOf(series: Series, thing: Thing): number | null {
  const steps: number[] = []
  for (const { at, on } of thing.changes.slice(-MOST_STEPS)) {
    const before = meanBetween(series, at - 4 * MINUTE_MS, at - MINUTE_MS)
    const after = meanBetween(series, at + MINUTE_MS, at + 4 * MINUTE_MS)
    if (Number.isNaN(before) || Number.isNaN(after)) continue
    steps.push(on ? after - before : before - after)
  }
  return steps.length < LEAST_STEPS ? null : quantile(steps, 0.5)
}

function meanBetween(series: Series, from: number, to: number): number {
  const a = lowerBound(series.t, from)
  const b = lowerBound(series.t, to)
  let sum = 0
  for (let i = a; i < b; i++) sum += series.v[i]!
  return b > a ? sum / (b - a) : Number.NaN
}
