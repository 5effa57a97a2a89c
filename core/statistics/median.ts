import { requireCount, requireFinite } from './checks.ts'

/**
 * Median: the middle value, or the mean of the two middle ones. Values in any order, not modified.
 *
 * @throws {CoreError} too_few_values (none), not_finite
 */
export function median(values: ArrayLike<number>): number {
  requireFinite('median', values)
  return medianSorted(Float64Array.from(values).sort())
}

/** The same for values that are already ascending (not checked). */
export function medianSorted(ascending: ArrayLike<number>): number {
  const n = ascending.length
  requireCount('median', n, 1)
  const half = n >> 1
  const upper = ascending[half]!
  if (n % 2 === 1) return upper
  const lower = ascending[half - 1]!
  return lower === upper ? upper : lower / 2 + upper / 2
}
