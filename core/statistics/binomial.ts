import betaCdf from '@stdlib/stats-base-dists-beta-cdf'
import { log1pMinus } from './log1p-minus.ts'
import { stirlingCorrection } from './stirling-correction.ts'

/**
 * Probability of exactly k successes in n trials; `p` and `q` = 1 − p are both passed, so that neither loses digits.
 * Loader's saddle-point form: accurate to about 13 digits for any n.
 *
 * @see Loader (2000), Fast and accurate computation of binomial probabilities
 */
export function binomialPmf(k: number, n: number, p: number, q: number): number {
  if (p === 0) return k === 0 ? 1 : 0
  if (q === 0) return k === n ? 1 : 0
  if (k === 0) return Math.exp(n * (p < 0.5 ? Math.log1p(-p) : Math.log(q)))
  if (k === n) return Math.exp(n * (q < 0.5 ? Math.log1p(-q) : Math.log(p)))
  const correction = stirlingCorrection(n) - stirlingCorrection(k) - stirlingCorrection(n - k)
  const deviance = deviancePart(k, n * p) + deviancePart(n - k, n * q)
  return Math.exp(correction - deviance) * Math.sqrt(n / (2 * Math.PI * k * (n - k)))
}

/** x ln(x / mean) + mean − x without cancellation. */
function deviancePart(x: number, mean: number): number {
  return -x * log1pMinus((mean - x) / x)
}

/** Probability of at most k successes in n trials, p + q = 1 (k < 0 gives 0). Source: Abramowitz & Stegun 26.5.24. */
export function binomialCdf(k: number, n: number, p: number, q: number): number {
  if (k < 0) return 0
  if (k >= n || p === 0) return 1
  return betaCdf(q, n - k, k + 1)
}

/** Probability of k or more successes in n trials, p + q = 1, with full precision in the far tail. */
export function binomialUpperTail(k: number, n: number, p: number, q: number): number {
  if (k <= 0) return 1
  if (k > n) return 0
  return q === 0 ? 1 : betaCdf(p, k, n - k + 1)
}
