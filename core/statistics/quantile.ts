import { requireCount, requireFinite, requireRange } from './checks.ts'

/** Which of Hyndman & Fan's nine definitions: 8 (median-unbiased, the default here) or 7 (linear between order statistics). */
export type QuantileType = 7 | 8

/**
 * Sample quantile for 0 <= p <= 1; the values may come in any order and are not modified. Unit of the values.
 * Sorts a copy; for several p of one sample sort once and use {@link quantileSorted}.
 *
 * @throws {CoreError} too_few_values (none), not_finite, out_of_range (p)
 * @see Hyndman & Fan (1996), The American Statistician 50, 361-365
 */
export function quantile(values: ArrayLike<number>, p: number, type: QuantileType = 8): number {
  requireFinite('quantile', values)
  return quantileSorted(Float64Array.from(values).sort(), p, type)
}

/** The same for values that are already ascending (not checked). */
export function quantileSorted(ascending: ArrayLike<number>, p: number, type: QuantileType = 8): number {
  const n = ascending.length
  requireCount('quantile', n, 1)
  requireRange('quantile', p >= 0 && p <= 1, 'p from 0 to 1', p)
  const offset = type === 7 ? 1 : 1 / 3
  // Position among 1 … n; a whole number to within rounding must count as whole.
  const position = offset + p * (n + 1 - 2 * offset)
  const fuzz = 4 * Number.EPSILON
  const below = Math.floor(position + fuzz)
  const share = Math.abs(position - below) < fuzz ? 0 : position - below
  const low = ascending[Math.min(n, Math.max(1, below)) - 1]!
  const high = ascending[Math.min(n, Math.max(1, below + 1)) - 1]!
  // Equal neighbours, or none needed: no arithmetic, so no rounding.
  return share === 0 || low === high ? low : (1 - share) * low + share * high
}
