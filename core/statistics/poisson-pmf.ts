import { log1pMinus } from './log1p-minus.ts'
import { stirlingCorrection } from './stirling-correction.ts'

/**
 * Natural logarithm of mean^k e^−mean / Γ(k + 1) for k >= 0 (k need not be whole), mean >= 0. The large terms are taken
 * against each other before they are computed, so that the result keeps about 14 digits up to k of a million.
 * The answer is −Infinity where the probability is exactly 0 (mean 0 and k > 0).
 *
 * @see Loader (2000), Fast and accurate computation of binomial probabilities
 */
export function logPoissonPmf(k: number, mean: number): number {
  if (mean === 0) return k === 0 ? 0 : Number.NEGATIVE_INFINITY
  if (k === 0) return -mean
  const deviation = (mean - k) / k
  // k ln(mean/k) + k − mean; only near the peak do the parts cancel.
  const exponent = Math.abs(deviation) < 0.5 ? k * log1pMinus(deviation) : k * Math.log(mean / k) + k - mean
  return exponent - stirlingCorrection(k) - 0.5 * Math.log(2 * Math.PI * k)
}

/** Poisson probability of exactly k events when `mean` are expected; see {@link logPoissonPmf}. */
export function poissonPmf(k: number, mean: number): number {
  return Math.exp(logPoissonPmf(k, mean))
}
