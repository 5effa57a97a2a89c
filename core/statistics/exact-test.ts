/** P-values of an exact test on a count; the names say which version of "two-sided" is meant. */
export interface ExactPValues {
  /** Probability of the observed count or less. */
  readonly pLess: number
  /** Probability of the observed count or more. */
  readonly pGreater: number
  /** Sum over all counts not more probable than the observed one (method of small p-values). */
  readonly pTwoSided: number
  /** Twice the smaller one-sided p-value, cut at 1; agrees with the central confidence interval. */
  readonly pTwoSidedDoubled: number
  /** The doubled p-value counting the observed value half; less conservative on average, not guaranteed. */
  readonly pTwoSidedMid: number
}

/** Fills in the two versions that follow from the one-sided p-values. */
export function exactPValues(pLess: number, pGreater: number, pTwoSided: number, pObserved: number): ExactPValues {
  const doubled = 2 * Math.min(pLess, pGreater)
  return {
    pLess,
    pGreater,
    pTwoSided,
    pTwoSidedDoubled: Math.min(1, doubled),
    pTwoSidedMid: Math.min(1, doubled - pObserved),
  }
}
