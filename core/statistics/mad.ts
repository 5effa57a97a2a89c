import { requireFinite } from './checks.ts'
import { median, medianSorted } from './median.ts'

/** 1 / Φ⁻¹(3/4): makes the median absolute deviation estimate the standard deviation of normal values. */
export const MAD_TO_SIGMA = 1.482602218505602

/**
 * Median absolute deviation from the median, times `scale` (by default {@link MAD_TO_SIGMA}; pass 1 for the raw value).
 * It is 0 when more than half of the values are equal.
 *
 * @throws {CoreError} too_few_values (none), not_finite
 * @see Hampel (1974), J. Amer. Statist. Assoc. 69, 383-393
 */
export function mad(values: ArrayLike<number>, scale: number = MAD_TO_SIGMA): number {
  requireFinite('mad', values)
  const centre = median(values)
  return scale * medianSorted(Float64Array.from(values, (x) => Math.abs(x - centre)).sort())
}
