import { laggedCorrelation } from '../statistics/correlation.ts'
import { quantile } from '../statistics/quantile.ts'
import type { Series } from '../timeline/series.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { minuteLevels } from './minute-levels.ts'
import { thinned } from './windows/held.ts'

const MINUTE_MS = 60_000
/** Changes over so many minutes, of at least so many amperes, are compared; so many of them make a verdict. */
const APART_MINUTES = 5
const LEAST_AMPS = 0.5
const LEAST_CHANGES = 30
/** How leakage and load current change together. */
export interface Together {
  /** Correlation of the changes of both, squared. */
  readonly correlation: number
  /** Conductive share of the current that these changes speak of, mA/A. */
  readonly maPerAmp: number
  /** How much of the usual headroom that share of the highest load current takes up. */
  readonly reach: number
  /** Whether leakage follows the current; null where nobody can tell. */
  readonly follows: boolean | null
}

/** A share that takes up less of the headroom even at the highest load is no cause of trips. */
const LEAST_REACH = 0.5
/** The highest load current is that of this share of the time. */
const HIGHEST = 0.999

/** Correlations from which on the leakage follows the current, and below which it does not; between them nobody can tell. */
const FOLLOWS = 0.88
const DOES_NOT = 0.74

/**
 * Whether leakage follows the load current of the group whichever load carries it: the mark of a neutral–earth fault
 * (domain.md). A conductive share k of the current I on a capacitive standing level B reads L = √(B² + (kI)²), so the
 * changes of L² go with those of I², with the slope k²; with loads that leak by themselves they do so only in part, and
 * the share falls short of the trip current `tripMa`. `usualMa` is the median level. Null without a load current or with
 * too few changes. Linear in minutes.
 */
export function followsCurrent(timeline: Timeline, minutes: Series, usualMa: number, tripMa: number): Together | null {
  const { loadCurrent } = timeline
  if (loadCurrent === null || minutes.t.length === 0) return null
  const current = minuteLevels(loadCurrent)
  const pairs = changesOfSquares(minutes, current)
  if (pairs.xs.length < LEAST_CHANGES) return null
  const correlation = laggedCorrelation(pairs.xs, pairs.ys, 0) ?? 0
  let xy = 0
  let xx = 0
  pairs.xs.forEach((x, i) => {
    xy += x * pairs.ys[i]!
    xx += x * x
  })
  const maPerAmp = Math.sqrt(Math.max(0, xy / xx))
  const highest = quantile(thinned(current.v, 20_000), HIGHEST)
  const usualAmps = quantile(thinned(current.v, 20_000), 0.5)
  const rise = Math.sqrt(Math.max(0, usualMa ** 2 + maPerAmp ** 2 * (highest ** 2 - usualAmps ** 2))) - usualMa
  const reach = rise / Math.max(tripMa - usualMa, 0.1 * tripMa)
  const follows = correlation >= FOLLOWS ? (reach >= LEAST_REACH ? true : null) : correlation < DOES_NOT ? false : null
  return { correlation, maPerAmp, reach, follows }
}

/** Changes of leakage and load current, both squared, over five minutes. */
function changesOfSquares(minutes: Series, current: Series): { xs: number[]; ys: number[] } {
  const xs: number[] = []
  const ys: number[] = []
  const { t, v } = minutes
  let k = 0
  // the amperes of each minute of leakage, walked along once
  const amps = new Float64Array(t.length).fill(Number.NaN)
  for (let i = 0; i < t.length; i++) {
    while (k < current.t.length && current.t[k]! < t[i]!) k++
    if (k < current.t.length && current.t[k] === t[i]) amps[i] = current.v[k]!
  }
  for (let i = APART_MINUTES; i < t.length; i++) {
    const then = i - APART_MINUTES
    const change = Math.abs(amps[i]! - amps[then]!)
    if (!(change >= LEAST_AMPS) || t[i]! - t[then]! > 3 * APART_MINUTES * MINUTE_MS) continue
    xs.push(amps[i]! ** 2 - amps[then]! ** 2)
    ys.push(v[i]! ** 2 - v[then]! ** 2)
  }
  return { xs, ys }
}
