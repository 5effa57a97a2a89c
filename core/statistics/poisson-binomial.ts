import { requireRange } from './checks.ts'

/**
 * Probability of at least `k` successes among independent trials with chances of their own, by adding one trial after another.
 * All chances equal gives the binomial. Cost: n². Chances in any order.
 *
 * @throws {CoreError} out_of_range (a chance outside [0, 1])
 * @see Wang (1993), Statistica Sinica 3, 295-312; the recursion is that of Chen, Dempster & Liu (1994), Biometrika 81, 457-469
 */
export function poissonBinomialUpperTail(k: number, chances: ArrayLike<number>): number {
  const n = chances.length
  for (let i = 0; i < n; i++)
    requireRange('poissonBinomialUpperTail', chances[i]! >= 0 && chances[i]! <= 1, 'chances from 0 to 1', chances[i])
  if (k <= 0) return 1
  if (k > n) return 0
  const counts = new Float64Array(n + 1)
  counts[0] = 1
  for (let i = 0; i < n; i++) {
    const p = chances[i]!
    for (let j = i + 1; j > 0; j--) counts[j] = counts[j]! * (1 - p) + counts[j - 1]! * p
    counts[0]! *= 1 - p
  }
  let tail = 0
  for (let j = n; j >= k; j--) tail += counts[j]!
  return Math.min(1, tail)
}
