import { CoreError } from '../errors.ts'

/** A least-squares problem factored once; solve it for as many right-hand sides as needed. */
export interface Qr {
  /** The b that minimises |A b − y|. */
  solve(y: ArrayLike<number>): Float64Array
  /** (AᵀA)⁻¹, row by row. */
  inverseGram(): Float64Array[]
}

/** A diagonal entry of R this small against its column's norm makes the columns count as dependent. */
const RANK_TOLERANCE = 1e-12

/**
 * QR factoring by Householder reflections of a matrix given as rows (m rows of n <= m values). It squares no condition
 * number, unlike the normal equations, and does not feel the units of the columns.
 *
 * @throws {CoreError} singular (columns depend on each other, or fewer rows than columns)
 * @see Golub & Van Loan (2013), Matrix Computations, 4th ed., section 5.2
 */
export function qr(rows: ArrayLike<ArrayLike<number>>, columns: number): Qr {
  const m = rows.length
  const n = columns
  if (m < n) throw new CoreError('singular', `qr got ${m} rows for ${n} columns`)
  // Columns of A; below and on the diagonal they become the Householder vectors.
  const a = Array.from({ length: n }, (_, j) => Float64Array.from({ length: m }, (_, i) => rows[i]![j]!))
  const diagonal = new Float64Array(n)
  for (let j = 0; j < n; j++) {
    const column = a[j]!
    const whole = norm(column, 0)
    const below = norm(column, j)
    if (!(below > RANK_TOLERANCE * whole)) throw new CoreError('singular', `qr: column ${j} depends on those before it`)
    // The sign that avoids cancellation; afterwards column[j…] is the vector v with H = I − v vᵀ / (|x| v_j).
    const signed = column[j]! > 0 ? -below : below
    diagonal[j] = signed
    column[j]! -= signed
    for (let k = j + 1; k < n; k++) reflect(column, a[k]!, j)
  }

  /** Solves R b = z from the last unknown up. */
  const backward = (z: Float64Array): Float64Array => {
    const b = new Float64Array(n)
    for (let j = n - 1; j >= 0; j--) {
      let sum = z[j]!
      for (let k = j + 1; k < n; k++) sum -= a[k]![j]! * b[k]!
      b[j] = sum / diagonal[j]!
    }
    return b
  }

  return {
    solve: (y) => {
      const z = Float64Array.from(y)
      for (let j = 0; j < n; j++) reflect(a[j]!, z, j)
      return backward(z)
    },
    inverseGram: () => {
      // (RᵀR)⁻¹ = R⁻¹ R⁻ᵀ; the columns of R⁻¹ solve R b = unit vector.
      const inverse = Array.from({ length: n }, (_, j) => {
        const unit = new Float64Array(m)
        unit[j] = 1
        return backward(unit)
      })
      return Array.from({ length: n }, (_, i) =>
        Float64Array.from({ length: n }, (_, j) => inverse.reduce((sum, column) => sum + column[i]! * column[j]!, 0)),
      )
    },
  }
}

/** Applies the reflection stored in `v` from row `from` on to the vector x. */
function reflect(v: Float64Array, x: Float64Array, from: number): void {
  let dot = 0
  let square = 0
  for (let i = from; i < v.length; i++) {
    dot += v[i]! * x[i]!
    square += v[i]! * v[i]!
  }
  const factor = (2 * dot) / square
  for (let i = from; i < v.length; i++) x[i]! -= factor * v[i]!
}

function norm(x: Float64Array, from: number): number {
  let sum = 0
  for (let i = from; i < x.length; i++) sum += x[i]! * x[i]!
  return Math.sqrt(sum)
}
