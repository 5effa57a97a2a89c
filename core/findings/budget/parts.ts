import tQuantile from '@stdlib/stats-base-dists-t-quantile'
import type { BudgetLine } from '../../contract/findings.ts'
import { magnitude } from '../../trade/leakage.ts'
import { rounded } from '../words.ts'
import type { Source } from './combine.ts'

/** What switching a thing changes in one component, mA: its size, standard error, and the level without the thing. */
export interface PartStep {
  readonly ma: number
  readonly error: number
  readonly freedom: number
  readonly withoutMa: number
}

/** A thing's own current in both parts, as fields of a budget line. */
export type OwnParts = Required<
  Pick<
    BudgetLine,
    | 'conductiveMa'
    | 'conductiveLow'
    | 'conductiveHigh'
    | 'capacitiveMa'
    | 'capacitiveLow'
    | 'capacitiveHigh'
    | 'ownLow'
    | 'ownHigh'
  >
>

/**
 * The change of the magnitude that goes with a change of both parts: |rest + own| − |rest|, its error by the first derivatives. Parts
 * add where magnitudes do not, so this is exact whatever the phase.
 */
export function sourceOfParts(conductive: PartStep, capacitive: PartStep): Source {
  const rest = { conductive: conductive.withoutMa, capacitive: capacitive.withoutMa }
  const whole = { conductive: rest.conductive + conductive.ma, capacitive: rest.capacitive + capacitive.ma }
  const size = magnitude(whole)
  const [g, b] = size > 0 ? [whole.conductive / size, whole.capacitive / size] : [1, 1]
  return {
    basis: 'switching',
    ma: size - magnitude(rest),
    error: Math.hypot(g * conductive.error, b * capacitive.error),
    freedom: Math.min(conductive.freedom, capacitive.freedom),
  }
}

/** Both parts with 90 % intervals, and the least and greatest own current that these leave. */
export function ownParts(conductive: PartStep, capacitive: PartStep): OwnParts {
  const [g, b] = [conductive, capacitive].map(({ ma, error, freedom }) => {
    const half = tQuantile(0.95, freedom) * error
    const low = ma - half
    const high = ma + half
    return { ma, low, high, least: low > 0 ? low : high < 0 ? -high : 0, most: Math.max(-low, high) }
  }) as [Part, Part]
  return {
    conductiveMa: rounded(g.ma),
    conductiveLow: rounded(g.low),
    conductiveHigh: rounded(g.high),
    capacitiveMa: rounded(b.ma),
    capacitiveLow: rounded(b.low),
    capacitiveHigh: rounded(b.high),
    ownLow: rounded(Math.hypot(g.least, b.least)),
    ownHigh: rounded(Math.hypot(g.most, b.most)),
  }
}

interface Part {
  readonly ma: number
  readonly low: number
  readonly high: number
  /** Least and greatest size. */
  readonly least: number
  readonly most: number
}

/**
 * Bounds of a thing's own current where only magnitudes are known: the level without it and the rise with it give |a − b| ≤ own ≤ a + b
 * of the two levels. Low and high are the ends of the rise's interval.
 */
export function ownBounds(withoutMa: number, low: number, high: number): Pick<OwnParts, 'ownLow' | 'ownHigh'> {
  const least = low > 0 ? low : high < 0 ? -high : 0
  return { ownLow: rounded(least), ownHigh: rounded(Math.max(least, 2 * Math.max(0, withoutMa) + high)) }
}
