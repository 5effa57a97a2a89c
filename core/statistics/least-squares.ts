import { requireFinite, requireRange, requireSameLength } from './checks.ts'
import { type Design, requireDesign, residualsOf, scaledRows } from './design.ts'
import { qr } from './qr.ts'

export interface LeastSquares {
  readonly coefficients: Float64Array
  /** y − X b, not weighted. */
  readonly residuals: Float64Array
  /** Σ w r². */
  readonly residualSumOfSquares: number
  /** Rows (of positive weight) less columns. */
  readonly degreesOfFreedom: number
  /** √(Σ w r² / df); null when no degree of freedom is left, and so are the next two. */
  readonly residualSd: number | null
  readonly standardErrors: Float64Array | null
  readonly covariance: readonly Float64Array[] | null
}

/**
 * Ordinary or weighted least squares: minimises Σ w (y − X b)². `x` holds rows; put a column of ones for an intercept.
 * Coefficients have the unit of y over the unit of their column. Solved by QR, good to Longley's data.
 *
 * @throws {CoreError} too_few_values, unequal_lengths, not_finite, singular, out_of_range (negative weight)
 * @see Seber & Lee (2003), Linear Regression Analysis, 2nd ed.; Longley (1967), JASA 62, 819-841
 */
export function leastSquares(x: Design, y: ArrayLike<number>, weights?: ArrayLike<number>): LeastSquares {
  const p = requireDesign('leastSquares', x, y)
  if (weights) {
    requireSameLength('leastSquares', y, weights)
    requireFinite('leastSquares', weights)
    for (let i = 0; i < weights.length; i++)
      requireRange('leastSquares', weights[i]! >= 0, 'weights from 0', weights[i])
  }
  const roots = Float64Array.from({ length: y.length }, (_, i) => (weights ? Math.sqrt(weights[i]!) : 1))
  const factored = qr(scaledRows(x, roots), p)
  const coefficients = factored.solve(Float64Array.from({ length: y.length }, (_, i) => roots[i]! * y[i]!))
  const residuals = residualsOf(x, y, coefficients)
  let rss = 0
  let used = 0
  for (let i = 0; i < residuals.length; i++) {
    rss += (roots[i]! * residuals[i]!) ** 2
    if (roots[i]! > 0) used++
  }
  const df = used - p
  const fit = { coefficients, residuals, residualSumOfSquares: rss, degreesOfFreedom: df }
  if (df <= 0) return { ...fit, residualSd: null, standardErrors: null, covariance: null }
  const covariance = factored.inverseGram().map((row) => row.map((v) => (v * rss) / df))
  const standardErrors = Float64Array.from(covariance, (row, j) => Math.sqrt(row[j]!))
  return { ...fit, residualSd: Math.sqrt(rss / df), standardErrors, covariance }
}
