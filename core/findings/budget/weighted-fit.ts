import { medianInPlace } from '../levels.ts'
import type { SparseDesign } from './separability.ts'

/** Loss in standard deviations of each row: wide, because a mean over runs is asked for and only true outliers are to be pulled in. */
const HUBER_K = 2.5
const MAD_TO_SIGMA = 1.4826
/** Rounds in which the spread of each column's rows is taken anew. */
const ROUNDS = 4

export interface WeightedFit {
  readonly coefficients: Float64Array
  /** Standard deviation of each column's own steps, beyond what every row wanders. */
  readonly spreads: Float64Array
  /**
   * Variances of weighted sums of coefficients: by the spreads of the rows (`model`), and by what the rows' residuals are
   * (`sandwich`: HC3 with leverage, lag 1).
   */
  variancesOf(contrasts: readonly (readonly (readonly [column: number, weight: number])[])[]): {
    readonly model: Float64Array
    readonly sandwich: Float64Array
  }
}

/**
 * Huber regression of rows with spreads of their own: a row wanders by its `sds`, and the steps of each column differ from time to
 * time by a spread that its rows' residuals show. So a thing that leaks now more, now less is averaged and not taken for
 * outliers round its commonest step, and a steady one keeps its narrow interval. The design must have full rank.
 *
 * @see Huber (1981), Robust Statistics, chapter 7; MacKinnon & White (1985), J. Econometrics 29, 305-325 (HC3)
 * @see Newey & West (1987), Econometrica 55, 703-708 (lag 1: neighbouring rows share a level)
 */
export function weightedFit(design: SparseDesign, sds: Float64Array): WeightedFit {
  const { p, index, signs, y } = design
  const n = y.length
  const spreads = new Float64Array(p)
  const precision = new Float64Array(n)
  const weights = new Float64Array(n).fill(1)
  const residuals = new Float64Array(n)
  let coefficients: Float64Array = new Float64Array(p)
  let inverse: Float64Array = new Float64Array(p * p)
  for (let round = 0; round < ROUNDS; round++) {
    for (let i = 0; i < n; i++) {
      let variance = sds[i]! ** 2
      for (const j of index[i]!) variance += spreads[j]! ** 2
      precision[i] = 1 / variance
    }
    for (let iteration = 0; iteration < 20; iteration++) {
      const both = weights.map((w, i) => w * precision[i]!)
      inverse = inverted(gram(design, both), p)
      const next = product(inverse, moments(design, both), p)
      let moved = 0
      for (let j = 0; j < p; j++) moved = Math.max(moved, Math.abs(next[j]! - coefficients[j]!))
      coefficients = next
      for (let i = 0; i < n; i++) {
        residuals[i] = y[i]! - fitted(index[i]!, signs[i]!, coefficients)
        weights[i] = Math.min(1, HUBER_K / Math.max(1e-12, Math.abs(residuals[i]!) * Math.sqrt(precision[i]!)))
      }
      if (moved < 1e-7 && iteration > 1) break
    }
    if (round < ROUNDS - 1) takeSpreads(design, sds, residuals, spreads)
  }
  return {
    coefficients,
    spreads,
    variancesOf(contrasts) {
      const model = Float64Array.from(contrasts, (contrast) => {
        let sum = 0
        for (const [a, wa] of contrast) for (const [b, wb] of contrast) sum += wa * wb * inverse[a * p + b]!
        return sum
      })
      return { model, sandwich: sandwich(design, precision, weights, residuals, inverse, contrasts) }
    },
  }
}

/** Beyond their own wander: by the middle size of the residuals of the rows in which a column takes part alone or with others. */
function takeSpreads(
  { p, index }: SparseDesign,
  sds: Float64Array,
  residuals: Float64Array,
  spreads: Float64Array,
): void {
  const sizes: number[][] = Array.from({ length: p }, () => [])
  const wander: number[] = new Array(p).fill(0)
  index.forEach((row, i) => {
    for (const j of row) {
      sizes[j]!.push(Math.abs(residuals[i]!))
      wander[j]! += sds[i]! ** 2
    }
  })
  for (let j = 0; j < p; j++) {
    const m = sizes[j]!.length
    if (m < 3) continue
    const seen = MAD_TO_SIGMA * medianInPlace(Float64Array.from(sizes[j]!)) * Math.sqrt(m / (m - 1))
    spreads[j] = Math.sqrt(Math.max(0, seen * seen - wander[j]! / m))
  }
}

function sandwich(
  { p, index, signs }: SparseDesign,
  precision: Float64Array,
  weights: Float64Array,
  residuals: Float64Array,
  inverse: Float64Array,
  contrasts: readonly (readonly (readonly [number, number])[])[],
): Float64Array {
  const plain = new Float64Array(contrasts.length)
  const lagged = new Float64Array(contrasts.length)
  let previous = new Float64Array(contrasts.length)
  // Rows of (Xᵀ W X)⁻¹ that the contrasts ask for.
  const pulls = contrasts.map((contrast) => {
    const row = new Float64Array(p)
    for (const [a, weight] of contrast) for (let j = 0; j < p; j++) row[j]! += weight * inverse[a * p + j]!
    return row
  })
  for (let i = 0; i < index.length; i++) {
    const row = index[i]!
    const sign = signs[i]!
    let leverage = 0
    for (let k = 0; k < row.length; k++) {
      for (let l = 0; l < row.length; l++) leverage += sign[k]! * sign[l]! * inverse[row[k]! * p + row[l]!]!
    }
    const weight = weights[i]! * precision[i]!
    const size = (weight * residuals[i]!) / Math.max(0.1, 1 - leverage * weight)
    const influence = new Float64Array(contrasts.length)
    for (let c = 0; c < contrasts.length; c++) {
      let pull = 0
      for (let k = 0; k < row.length; k++) pull += sign[k]! * pulls[c]![row[k]!]!
      influence[c] = pull * size
      plain[c]! += influence[c]! ** 2
      lagged[c]! += 2 * influence[c]! * previous[c]!
    }
    previous = influence
  }
  return plain.map((v, c) => Math.max(v, v + lagged[c]!))
}

function fitted(index: readonly number[], signs: readonly number[], coefficients: Float64Array): number {
  let sum = 0
  for (let k = 0; k < index.length; k++) sum += signs[k]! * coefficients[index[k]!]!
  return sum
}

function gram({ p, index, signs }: SparseDesign, weights: Float64Array): Float64Array {
  const g = new Float64Array(p * p)
  for (let i = 0; i < index.length; i++) {
    const row = index[i]!
    for (let k = 0; k < row.length; k++) {
      for (let l = 0; l < row.length; l++) {
        g[row[k]! * p + row[l]!]! += weights[i]! * signs[i]![k]! * signs[i]![l]!
      }
    }
  }
  return g
}

function moments({ p, index, signs, y }: SparseDesign, weights: Float64Array): Float64Array {
  const v = new Float64Array(p)
  for (let i = 0; i < index.length; i++) {
    index[i]!.forEach((j, k) => {
      v[j]! += weights[i]! * signs[i]![k]! * y[i]!
    })
  }
  return v
}

function product(a: Float64Array, v: Float64Array, m: number): Float64Array {
  const out = new Float64Array(m)
  for (let r = 0; r < m; r++) for (let c = 0; c < m; c++) out[r]! += a[r * m + c]! * v[c]!
  return out
}

/** Inverse of a positive definite matrix by Gauss–Jordan elimination; pivots lie on the diagonal. */
function inverted(source: Float64Array, m: number): Float64Array {
  const a = source.slice()
  const inverse = new Float64Array(m * m)
  for (let r = 0; r < m; r++) inverse[r * m + r] = 1
  for (let pivot = 0; pivot < m; pivot++) {
    const scale = a[pivot * m + pivot]!
    for (let c = 0; c < m; c++) {
      a[pivot * m + c]! /= scale
      inverse[pivot * m + c]! /= scale
    }
    for (let r = 0; r < m; r++) {
      const factor = a[r * m + pivot]!
      if (r === pivot || factor === 0) continue
      for (let c = 0; c < m; c++) {
        a[r * m + c]! -= factor * a[pivot * m + c]!
        inverse[r * m + c]! -= factor * inverse[pivot * m + c]!
      }
    }
  }
  return inverse
}
