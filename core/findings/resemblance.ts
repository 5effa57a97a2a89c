/**
 * How many neighbouring values count as one, because each resembles the next: 1 + 2 Σ (1 − k/n) r_k, up to where the
 * autocorrelation first dies out or `mostLags`. 1 for values that do not vary.
 *
 * @see Yue & Wang (2004), Water Resources Management 18, 201-218
 */
export function resemblance(values: ArrayLike<number>, mostLags: number): number {
  const n = values.length
  let mean = 0
  for (let i = 0; i < n; i++) mean += values[i]! / n
  let total = 0
  for (let i = 0; i < n; i++) total += (values[i]! - mean) ** 2
  if (total === 0) return 1
  let factor = 1
  for (let k = 1; k <= Math.min(mostLags, n >> 1); k++) {
    let sum = 0
    for (let i = k; i < n; i++) sum += (values[i]! - mean) * (values[i - k]! - mean)
    if (sum <= 0) break
    factor += (2 * (1 - k / n) * sum) / total
  }
  return factor
}
