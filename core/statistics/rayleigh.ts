import normalCdf from '@stdlib/stats-base-dists-normal-cdf'
import { requireRange } from './checks.ts'
import { meanDirection, requireCircle } from './mean-direction.ts'

export interface Rayleigh {
  readonly resultant: number
  /** n times the squared mean resultant length. */
  readonly z: number
  /** Zar's form, good to three digits from n = 10 on and never 0; the one to report. */
  readonly p: number
  /** Second-order series; sharper for moderate z, cut to 0 for strongly concentrated events. */
  readonly pSeries: number
}

/**
 * Rayleigh test: do events on a circle gather round one direction? Blind to two opposite gatherings. Clock times must be
 * transformed by the energised share first, or the time switched off gives false alarms.
 *
 * @throws {CoreError} too_few_values (none), not_finite, out_of_range (period)
 * @see Mardia & Jupp (2000), section 6.3.1; Zar (1999), Biostatistical Analysis, 4th ed., equation 27.4
 */
export function rayleigh(values: ArrayLike<number>, period: number): Rayleigh {
  const { resultant } = meanDirection(values, period)
  const n = values.length
  const z = n * resultant * resultant
  const series = 1 + (2 * z - z ** 2) / (4 * n) - (24 * z - 132 * z ** 2 + 76 * z ** 3 - 9 * z ** 4) / (288 * n * n)
  const zar = Math.exp(Math.sqrt(1 + 4 * n + 4 * (n * n - n * z)) - (1 + 2 * n))
  return { resultant, z, p: Math.min(1, zar), pSeries: Math.min(1, Math.max(0, Math.exp(-z) * series)) }
}

export interface DirectedRayleigh {
  /** Mean cosine of the angles from the given direction. */
  readonly component: number
  /** √(2n) times the component. */
  readonly z: number
  /** One-sided: small when the events gather round the given direction. */
  readonly p: number
}

/**
 * Rayleigh test with a given direction (V test), one-sided: stronger when the clock time is known beforehand.
 *
 * @throws {CoreError} too_few_values (none), not_finite, out_of_range
 * @see Mardia & Jupp (2000), section 6.3.1, equation 6.3.9
 */
export function rayleighDirected(values: ArrayLike<number>, period: number, direction: number): DirectedRayleigh {
  requireCircle('rayleighDirected', values, period)
  requireRange('rayleighDirected', Number.isFinite(direction), 'a finite direction', direction)
  const n = values.length
  let sum = 0
  for (let i = 0; i < n; i++) sum += Math.cos((2 * Math.PI * (values[i]! - direction)) / period)
  const component = sum / n
  const z = Math.sqrt(2 * n) * component
  const density = Math.exp((-z * z) / 2) / Math.sqrt(2 * Math.PI)
  const series = (3 * z - z ** 3) / (16 * n) + (15 * z + 305 * z ** 3 - 125 * z ** 5 + 9 * z ** 7) / (4608 * n * n)
  return { component, z, p: Math.min(1, Math.max(0, normalCdf(-z, 0, 1) + density * series)) }
}
