import { requireRange } from './checks.ts'
import { stirlingCorrection } from './stirling-correction.ts'

const HALF_LOG_TWO_PI = 0.9189385332046728

/**
 * Natural logarithm of the gamma function for x > 0. Small arguments are lifted by Γ(x + 1) = x Γ(x) until Stirling's
 * series is exact to the last digits. Error about 1e-15 times the larger of 1 and the result.
 *
 * @throws {CoreError} out_of_range (x <= 0 or not finite)
 * @see Abramowitz & Stegun (1964), Handbook of Mathematical Functions, 6.1.15 and 6.1.41
 */
export function logGamma(x: number): number {
  requireRange('logGamma', x > 0 && x < Number.POSITIVE_INFINITY, 'a finite x above 0', x)
  let product = 1
  let z = x
  while (z < 15) {
    product *= z
    z += 1
  }
  return (z - 0.5) * Math.log(z) - z + HALF_LOG_TWO_PI + stirlingCorrection(z) - Math.log(product)
}
