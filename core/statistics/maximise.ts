import { CoreError } from '../errors.ts'
import { cholesky } from './cholesky.ts'

/** A log likelihood seen at one point: its value, its slope and its (expected or observed) information. */
export interface Likelihood {
  readonly value: number
  readonly gradient: Float64Array
  readonly information: readonly Float64Array[]
}

/**
 * Newton's method (or scoring) for a concave log likelihood, halving steps that go down. `reach` holds the largest size of each column
 * of the design: a step is over when it moves no linear predictor by more than rounding. A maximum at infinity, as
 * separated data have, never gets there and ends in `no_convergence`.
 *
 * @throws {CoreError} singular (at the start: columns depend on each other), no_convergence
 */
export function maximise(
  name: string,
  at: (b: Float64Array) => Likelihood,
  start: Float64Array,
  reach: ArrayLike<number>,
): { readonly b: Float64Array; readonly likelihood: Likelihood } {
  let b = start
  const origin = at(b)
  let now = origin
  for (let step = 0; step < 200; step++) {
    let move = newtonStep(name, now, step)
    // No step may move a predictor by more than 5: far out the parabola says little.
    const longest = move.reduce((most, v, j) => Math.max(most, Math.abs(v) * reach[j]!), 0)
    if (longest > 5) move = move.map((v) => (v * 5) / longest)
    let next = b.map((v, j) => v + move[j]!)
    let then = at(next)
    const resize = (factor: number): void => {
      move = move.map((v) => v * factor)
      next = b.map((v, j) => v + move[j]!)
      then = at(next)
    }
    // With scoring the step may be far from the right length: the slopes at both ends say by how much (secant rule).
    const slope = along(now.gradient, move)
    const slopeThere = along(then.gradient, move)
    if (then.value > Number.NEGATIVE_INFINITY && Math.abs(slopeThere) > 0.5 * slope) {
      resize(slopeThere >= slope ? 4 : Math.min(4, Math.max(0.1, slope / (slope - slopeThere))))
    }
    const slack = 1e-12 * (1 + Math.abs(now.value))
    for (let half = 0; half < 40 && !(then.value >= now.value - slack); half++) resize(0.5)
    const moved = move.reduce((most, v, j) => Math.max(most, Math.abs(v) * reach[j]!), 0)
    const size = next.reduce((most, v, j) => Math.max(most, Math.abs(v) * reach[j]!), 1)
    b = next
    now = then
    if (size > 1e4) break
    // Where the information has all but vanished, slopes are rounding: the maximum lies at infinity.
    if (now.information.some((row, j) => row[j]! < 1e-11 * origin.information[j]![j]!)) break
    if (moved <= 1e-9 * size) return { b, likelihood: now }
  }
  throw new CoreError('no_convergence', `${name}: no finite maximum (are the data separated?)`)
}

function newtonStep(name: string, now: Likelihood, step: number): Float64Array {
  try {
    return cholesky(now.information).solve(now.gradient)
  } catch (error) {
    // On the way to infinity the information vanishes; that is not the caller's columns.
    if (step > 0 && error instanceof CoreError && error.code === 'singular') {
      throw new CoreError('no_convergence', `${name}: no finite maximum (are the data separated?)`)
    }
    throw error
  }
}

function along(gradient: Float64Array, move: Float64Array): number {
  return gradient.reduce((sum, g, j) => sum + g * move[j]!, 0)
}

/** Largest size of each column. */
export function columnReach(x: ArrayLike<ArrayLike<number>>, columns: number): Float64Array {
  const reach = new Float64Array(columns)
  for (let i = 0; i < x.length; i++) {
    for (let j = 0; j < columns; j++) reach[j] = Math.max(reach[j]!, Math.abs(x[i]![j]!))
  }
  return reach
}

/** A square matrix of zeros. */
export function squareZeros(n: number): Float64Array[] {
  return Array.from({ length: n }, () => new Float64Array(n))
}

/** Adds weight · x xᵀ to a matrix. */
export function addOuter(matrix: readonly Float64Array[], x: ArrayLike<number>, weight: number): void {
  for (let i = 0; i < x.length; i++) {
    for (let j = 0; j < x.length; j++) matrix[i]![j]! += weight * x[i]! * x[j]!
  }
}

export interface Fit {
  readonly coefficients: Float64Array
  readonly standardErrors: Float64Array
  readonly covariance: readonly Float64Array[]
  readonly logLikelihood: number
}

/** Coefficients with the errors that the information at the maximum gives. */
export function fitOf(b: Float64Array, likelihood: Likelihood): Fit {
  const covariance = cholesky(likelihood.information).inverse()
  return {
    coefficients: b,
    standardErrors: Float64Array.from(covariance, (row, j) => Math.sqrt(row[j]!)),
    covariance,
    logLikelihood: likelihood.value,
  }
}
