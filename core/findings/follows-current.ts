import { laggedCorrelation } from '../statistics/correlation.ts'
import type { Series } from '../timeline/series.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { minuteLevels } from './minute-levels.ts'

const MINUTE_MS = 60_000
/** Changes over so many minutes, of at least so many amperes, are compared; so many of them make a verdict. */
const APART_MINUTES = 5
const LEAST_AMPS = 0.5
const LEAST_CHANGES = 30
/** How leakage and load current change together. */
export interface Together {
  /** Correlation of the changes of both, squared. */
  readonly correlation: number
  /** Whether leakage follows the current; null where nobody can tell. */
  readonly follows: boolean | null
}

/** Correlations from which on the leakage follows the current, and below which it does not; between them nobody can tell. */
const FOLLOWS = 0.8
const DOES_NOT = 0.74

/**
 * Whether leakage follows the load current of the group whichever load carries it: the mark of a neutral–earth fault
 * (domain.md). A conductive share k of the current I on a capacitive standing level B reads L = √(B² + (kI)²), so the
 * changes of L² go with those of I²; with loads that leak by themselves they do so only in part. Null without a load
 * current or with too few changes. Linear in minutes.
 */
export function followsCurrent(timeline: Timeline, minutes: Series): Together | null {
  const { loadCurrent } = timeline
  if (loadCurrent === null || minutes.t.length === 0) return null
  const correlation = squaresTogether(minutes, loadCurrent)
  if (correlation === null) return null
  return { correlation, follows: correlation >= FOLLOWS ? true : correlation < DOES_NOT ? false : null }
}

/** Pearson correlation of the changes of leakage and load current, both squared, over five minutes; null with too few. */
function squaresTogether(minutes: Series, loadCurrent: Series): number | null {
  const current = minuteLevels(loadCurrent)
  const amps = new Map<number, number>()
  current.t.forEach((t, i) => {
    amps.set(t, current.v[i]!)
  })
  const xs: number[] = []
  const ys: number[] = []
  for (let i = APART_MINUTES; i < minutes.t.length; i++) {
    const [now, then] = [minutes.t[i]!, minutes.t[i - APART_MINUTES]!]
    const [one, other] = [amps.get(now), amps.get(then)]
    if (one === undefined || other === undefined || now - then > 3 * APART_MINUTES * MINUTE_MS) continue
    if (Math.abs(one - other) < LEAST_AMPS) continue
    xs.push(one ** 2 - other ** 2)
    ys.push(minutes.v[i]! ** 2 - minutes.v[i - APART_MINUTES]! ** 2)
  }
  return xs.length < LEAST_CHANGES ? null : laggedCorrelation(xs, ys, 0)
}
