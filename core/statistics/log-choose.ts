import { requireRange } from './checks.ts'
import { logGamma } from './log-gamma.ts'

/**
 * Natural logarithm of the binomial coefficient "n over k" for whole 0 <= k <= n; exact to rounding up to n = 60 or so
 * (a product), by ln Γ beyond.
 *
 * @throws {CoreError} out_of_range
 */
export function logChoose(n: number, k: number): number {
  requireRange(
    'logChoose',
    Number.isSafeInteger(n) && Number.isSafeInteger(k) && k >= 0 && k <= n,
    'whole 0 <= k <= n',
    `n ${n}, k ${k}`,
  )
  const few = Math.min(k, n - k)
  if (few > 30) return logGamma(n + 1) - logGamma(k + 1) - logGamma(n - k + 1)
  let product = 1
  for (let i = 1; i <= few; i++) product *= (n - few + i) / i
  // For huge n and k of 20 to 30 the product may leave the range of a double.
  return product < Number.MAX_VALUE ? Math.log(product) : logGamma(n + 1) - logGamma(k + 1) - logGamma(n - k + 1)
}
