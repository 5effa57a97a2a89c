import { requireRange } from './checks.ts'
import { gammaRegularised } from './gamma-regularised.ts'

/** Probability of at most k events when `mean` are expected (k < 0 gives 0). Source: Abramowitz & Stegun 26.4.21. */
export function poissonCdf(k: number, mean: number): number {
  requireRange('poissonCdf', mean >= 0, 'a mean from 0', mean)
  return k < 0 ? 0 : gammaRegularised(Math.floor(k) + 1, mean).upper
}

/** Probability of k or more events when `mean` are expected, with full precision in the far tail. */
export function poissonUpperTail(k: number, mean: number): number {
  requireRange('poissonUpperTail', mean >= 0, 'a mean from 0', mean)
  return k <= 0 ? 1 : gammaRegularised(Math.ceil(k), mean).lower
}
