import { requireRange } from './checks.ts'
import { gammaRegularised } from './gamma-regularised.ts'

/** Probability that a chi-squared variable with `df` degrees of freedom is at most x (x >= 0). */
export function chiSquaredCdf(x: number, df: number): number {
  requireRange('chiSquaredCdf', df > 0, 'degrees of freedom above 0', df)
  return gammaRegularised(df / 2, x / 2).lower
}

/** Probability that a chi-squared variable with `df` degrees of freedom exceeds x: the p-value of such a statistic. */
export function chiSquaredUpperTail(x: number, df: number): number {
  requireRange('chiSquaredUpperTail', df > 0, 'degrees of freedom above 0', df)
  return gammaRegularised(df / 2, x / 2).upper
}
