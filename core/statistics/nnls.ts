import { CoreError } from '../errors.ts'
import { type Design, requireDesign, residualsOf } from './design.ts'
import { qr } from './qr.ts'

export interface Nnls {
  /** The solution, every entry >= 0. */
  readonly coefficients: Float64Array
  readonly residuals: Float64Array
  readonly residualSumOfSquares: number
  /** Aᵀ(b − A x): 0 where the coefficient is positive, <= 0 where it is held at 0. */
  readonly gradient: Float64Array
}

/**
 * Non-negative least squares: minimises |A x − b| with x >= 0, by Lawson & Hanson's active set method. Columns enter one by
 * one where the gradient pulls most; a column whose coefficient would turn negative leaves again.
 *
 * @throws {CoreError} too_few_values, unequal_lengths, not_finite, singular, no_convergence
 * @see Lawson & Hanson (1974), Solving Least Squares Problems, chapter 23
 */
export function nnls(a: Design, b: ArrayLike<number>): Nnls {
  const n = requireDesign('nnls', a, b)
  const x = new Float64Array(n)
  let passive: number[] = []
  const norms = Float64Array.from({ length: n }, (_, j) => Math.sqrt(sum(a.length, (i) => a[i]![j]! ** 2)))
  const size = Math.sqrt(sum(b.length, (i) => b[i]! ** 2))

  for (let step = 0; step < 30 * n + 10; step++) {
    const residuals = residualsOf(a, b, x)
    const gradient = Float64Array.from({ length: n }, (_, j) => sum(a.length, (i) => a[i]![j]! * residuals[i]!))
    // The column that pulls most, beyond rounding.
    let enter = -1
    for (let j = 0; j < n; j++) {
      if (passive.includes(j) || gradient[j]! <= 1e-12 * norms[j]! * size) continue
      if (enter < 0 || gradient[j]! > gradient[enter]!) enter = j
    }
    if (enter < 0) {
      return { coefficients: x, residuals, residualSumOfSquares: sum(b.length, (i) => residuals[i]! ** 2), gradient }
    }
    passive = [...passive, enter].sort((i, j) => i - j)
    for (;;) {
      const free = solveFree(a, b, passive)
      if (free.every((v) => v > 0)) {
        x.fill(0)
        passive.forEach((j, at) => {
          x[j] = free[at]!
        })
        break
      }
      // Go towards the free solution until the first coefficient meets 0; drop those that are there.
      let share = 1
      passive.forEach((j, at) => {
        if (free[at]! <= 0) share = Math.min(share, x[j]! / (x[j]! - free[at]!))
      })
      const held = passive
      passive = []
      held.forEach((j, at) => {
        const moved = x[j]! + share * (free[at]! - x[j]!)
        const stays = free[at]! > 0 || moved > 1e-14 * Math.abs(free[at]!)
        x[j] = stays ? moved : 0
        if (stays && moved > 0) passive.push(j)
      })
      if (passive.length === 0) break
    }
  }
  throw new CoreError('no_convergence', `nnls did not settle with ${n} columns`)
}

function solveFree(a: Design, b: ArrayLike<number>, passive: readonly number[]): Float64Array {
  const rows = Array.from({ length: a.length }, (_, i) => passive.map((j) => a[i]![j]!))
  return qr(rows, passive.length).solve(b)
}

function sum(n: number, term: (i: number) => number): number {
  let total = 0
  for (let i = 0; i < n; i++) total += term(i)
  return total
}
