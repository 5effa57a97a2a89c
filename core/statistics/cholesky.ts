import { CoreError } from '../errors.ts'

/** A symmetric positive definite matrix, factored. */
export interface Cholesky {
  solve(b: ArrayLike<number>): Float64Array
  inverse(): Float64Array[]
  readonly logDeterminant: number
}

/** A pivot this small beside its diagonal entry makes the matrix count as singular. */
const PIVOT_TOLERANCE = 1e-13

/**
 * Cholesky factoring; rows and columns are first scaled to a unit diagonal, so that units of the unknowns do not matter.
 *
 * @throws {CoreError} singular
 * @see Golub & Van Loan (2013), Matrix Computations, 4th ed., section 4.2
 */
export function cholesky(matrix: ArrayLike<ArrayLike<number>>): Cholesky {
  const n = matrix.length
  const scale = Float64Array.from({ length: n }, (_, i) => 1 / Math.sqrt(matrix[i]![i]!))
  const lower = Array.from({ length: n }, () => new Float64Array(n))
  let logDeterminant = 0
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i]![j]! * scale[i]! * scale[j]!
      for (let k = 0; k < j; k++) sum -= lower[i]![k]! * lower[j]![k]!
      if (i > j) lower[i]![j] = sum / lower[j]![j]!
      else if (sum > PIVOT_TOLERANCE && Number.isFinite(sum)) lower[i]![i] = Math.sqrt(sum)
      else throw new CoreError('singular', `cholesky: pivot ${sum} in row ${i}`)
    }
    logDeterminant += 2 * (Math.log(lower[i]![i]!) - Math.log(scale[i]!))
  }
  const solve = (b: ArrayLike<number>): Float64Array => {
    const x = Float64Array.from({ length: n }, (_, i) => b[i]! * scale[i]!)
    for (let i = 0; i < n; i++) {
      for (let k = 0; k < i; k++) x[i]! -= lower[i]![k]! * x[k]!
      x[i]! /= lower[i]![i]!
    }
    for (let i = n - 1; i >= 0; i--) {
      for (let k = i + 1; k < n; k++) x[i]! -= lower[k]![i]! * x[k]!
      x[i]! /= lower[i]![i]!
    }
    return x.map((v, i) => v * scale[i]!)
  }
  return {
    solve,
    inverse: () =>
      Array.from({ length: n }, (_, i) => solve(Float64Array.from({ length: n }, (_, j) => (i === j ? 1 : 0)))),
    logDeterminant,
  }
}
