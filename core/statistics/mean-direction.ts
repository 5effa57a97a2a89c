import { requireCount, requireFinite, requireRange } from './checks.ts'

export interface MeanDirection {
  readonly sumCos: number
  readonly sumSin: number
  /** Mean resultant length: 0 for events spread evenly, 1 for events at one point. */
  readonly resultant: number
  /** Mean direction in [0, period), in the unit of the values; null when the events cancel out. */
  readonly direction: number | null
  /** √(−2 ln resultant) in the unit of the values; null when the events cancel out. */
  readonly circularSd: number | null
}

/** Below this mean resultant length a direction is rounding error. */
const NO_DIRECTION = 1e-12

/**
 * Mean direction of events on a circle, say hours of the day with period 24. Any finite value counts modulo the period.
 *
 * @throws {CoreError} too_few_values (none), not_finite, out_of_range (period)
 * @see Mardia & Jupp (2000), Directional Statistics, section 2.3
 */
export function meanDirection(values: ArrayLike<number>, period: number): MeanDirection {
  requireCircle('meanDirection', values, period)
  let sumCos = 0
  let sumSin = 0
  for (let i = 0; i < values.length; i++) {
    const angle = (2 * Math.PI * values[i]!) / period
    sumCos += Math.cos(angle)
    sumSin += Math.sin(angle)
  }
  const resultant = Math.min(1, Math.hypot(sumCos, sumSin) / values.length)
  if (resultant < NO_DIRECTION) return { sumCos, sumSin, resultant, direction: null, circularSd: null }
  const turn = Math.atan2(sumSin, sumCos) / (2 * Math.PI)
  return {
    sumCos,
    sumSin,
    resultant,
    direction: onCircle(turn * period, period),
    circularSd: (Math.sqrt(-2 * Math.log(resultant)) * period) / (2 * Math.PI),
  }
}

/** Preconditions shared by the circular methods. */
export function requireCircle(name: string, values: ArrayLike<number>, period: number): void {
  requireCount(name, values.length, 1)
  requireFinite(name, values)
  requireRange(name, period > 0 && period < Number.POSITIVE_INFINITY, 'a finite period above 0', period)
}

/** The value's place in [0, period). */
export function onCircle(value: number, period: number): number {
  const rest = value % period
  const place = rest < 0 ? rest + period : rest
  return place < period ? place : 0
}
