import { meanDirection } from './mean-direction.ts'

export interface VonMises {
  /** Null when the events cancel out. */
  readonly direction: number | null
  /** Concentration by maximum likelihood: 0 uniform, Infinity when all events are equal. */
  readonly kappa: number
  /** Corrected for the bias of small samples (Best & Fisher). */
  readonly kappaCorrected: number
  /** Standard errors of kappa and of the direction (in the unit of the values); null at kappa 0 or Infinity. */
  readonly kappaError: number | null
  readonly directionError: number | null
}

/**
 * Von Mises distribution fitted to events on a circle: kappa solves I₁(κ)/I₀(κ) = mean resultant length.
 *
 * @throws {CoreError} too_few_values (none), not_finite, out_of_range (period)
 * @see Mardia & Jupp (2000), section 5.3.1; Best & Fisher (1981), Comm. Statist. B 10, 493-502
 */
export function vonMises(values: ArrayLike<number>, period: number): VonMises {
  const { resultant: r, direction } = meanDirection(values, period)
  const n = values.length
  if (direction === null) return { direction, kappa: 0, kappaCorrected: 0, kappaError: null, directionError: null }
  if (1 - r < 1e-14) {
    const infinite = Number.POSITIVE_INFINITY
    return { direction, kappa: infinite, kappaCorrected: infinite, kappaError: null, directionError: null }
  }
  const kappa = vonMisesKappa(r)
  const kappaCorrected = kappa < 2 ? Math.max(0, kappa - 2 / (n * kappa)) : ((n - 1) ** 3 * kappa) / (n ** 3 + n)
  return {
    direction,
    kappa,
    kappaCorrected,
    kappaError: 1 / Math.sqrt(n * (1 - r * r - r / kappa)),
    directionError: period / (2 * Math.PI * Math.sqrt(n * r * kappa)),
  }
}

/** The kappa whose mean resultant length is r, 0 < r < 1: Newton from Best & Fisher's approximation. */
export function vonMisesKappa(r: number): number {
  let kappa = start(r)
  for (let step = 0; step < 50; step++) {
    const a = besselRatio(kappa)
    const next = kappa - (a - r) / (1 - a * a - a / kappa)
    const close = Math.abs(next - kappa) <= 1e-14 * kappa
    kappa = next > 0 ? next : kappa / 2
    if (close) break
  }
  return kappa
}

function start(r: number): number {
  if (r < 0.53) return 2 * r + r ** 3 + (5 * r ** 5) / 6
  if (r < 0.85) return -0.4 + 1.39 * r + 0.43 / (1 - r)
  return 1 / (r ** 3 - 4 * r ** 2 + 3 * r)
}

/**
 * I₁(κ)/I₀(κ): Gauss's continued fraction from the far end, or for large κ the asymptotic series.
 *
 * @see Abramowitz & Stegun (1964), 9.1.73 and 9.7.1
 */
function besselRatio(kappa: number): number {
  if (kappa > 500) {
    const x = 1 / kappa
    return 1 - x / 2 - x ** 2 / 8 - x ** 3 / 8 - (25 * x ** 4) / 128
  }
  let fraction = 0
  for (let k = Math.ceil(30 + 2 * kappa); k >= 1; k--) fraction = 1 / ((2 * k) / kappa + fraction)
  return fraction
}
