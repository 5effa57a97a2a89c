import { requireConfidence, requireRange } from './checks.ts'

/**
 * Upper limit of a rate when no event was seen in `exposure`: −ln(1 − confidence) / exposure, one-sided. At 95 % that is
 * 2.9957 / exposure, whence the name. Per the unit of exposure.
 *
 * @throws {CoreError} out_of_range (exposure <= 0)
 * @see Hanley & Lippman-Hand (1983), JAMA 249, 1743-1745
 */
export function ruleOfThree(exposure: number, options: { readonly confidence?: number } = {}): number {
  const confidence = options.confidence ?? 0.95
  requireRange(
    'ruleOfThree',
    exposure > 0 && exposure < Number.POSITIVE_INFINITY,
    'a finite exposure above 0',
    exposure,
  )
  requireConfidence('ruleOfThree', confidence)
  return -Math.log1p(-confidence) / exposure
}
