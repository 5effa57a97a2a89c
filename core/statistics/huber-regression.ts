import { CoreError } from '../errors.ts'
import { requireRange } from './checks.ts'
import { type Design, requireDesign, residualsOf, scaledRows } from './design.ts'
import { median } from './median.ts'
import { qr } from './qr.ts'

export interface HuberOptions {
  /** Where the loss turns from square to straight, in scales; 1.345 keeps 95 % efficiency at normal errors. */
  readonly k?: number
  /** A known scale (standard deviation of sound residuals); else estimated from the residuals' median size. */
  readonly scale?: number
}

export interface HuberFit {
  readonly coefficients: Float64Array
  readonly residuals: Float64Array
  /** Scale of the residuals; 0 when more than half of them vanish. */
  readonly scale: number
  /** 1 for rows taken in full, less for rows pulled in. */
  readonly weights: Float64Array
  /** Huber's (1981, 7.6.4) errors, for residuals of one spread; null without a degree of freedom. */
  readonly standardErrors: Float64Array | null
  /** Sandwich errors, which hold for residuals of unequal spread. */
  readonly sandwichErrors: Float64Array
}

/** The normal's upper quartile to the four digits that robust regression has always used. */
const MAD_DIVISOR = 0.6745
const MAX_STEPS = 5000

/**
 * Huber's M-estimate of a linear regression, by iteratively reweighted least squares; the scale is median|r| / 0.6745, taken
 * anew in every step unless given. It resists outliers in y, not far-off rows of x.
 *
 * @throws {CoreError} too_few_values, unequal_lengths, not_finite, singular, out_of_range, no_convergence
 * @see Huber (1964), Ann. Math. Statist. 35, 73-101; Huber (1981), Robust Statistics, chapter 7
 */
export function huberRegression(x: Design, y: ArrayLike<number>, options: HuberOptions = {}): HuberFit {
  const { k = 1.345, scale: fixed } = options
  const p = requireDesign('huberRegression', x, y)
  requireRange('huberRegression', k > 0, 'k above 0', k)
  if (fixed !== undefined) requireRange('huberRegression', fixed > 0, 'a scale above 0', fixed)
  const largest = Array.from(y).reduce((most, v) => Math.max(most, Math.abs(v)), 0)

  let weights = new Float64Array(y.length).fill(1)
  let coefficients = weightedFit(x, y, weights, p)
  for (let step = 0; step < MAX_STEPS; step++) {
    const residuals = residualsOf(x, y, coefficients)
    const scale = fixed ?? median(residuals.map(Math.abs)) / MAD_DIVISOR
    // Below rounding of y the scale is 0: rows on the plane count, the others cannot.
    if (scale <= 1e-14 * largest) {
      weights = residuals.map((r) => (Math.abs(r) <= 1e-13 * largest ? 1 : 0))
      return finish(x, { coefficients, residuals, scale: 0, weights }, k, p)
    }
    weights = residuals.map((r) => Math.min(1, (k * scale) / Math.abs(r)))
    const next = weightedFit(x, y, weights, p)
    const moved = Math.max(...residualsOf(x, y, next).map((r, i) => Math.abs(r - residuals[i]!)))
    coefficients = next
    if (moved <= 1e-11 * scale)
      return finish(x, { coefficients, residuals: residualsOf(x, y, next), scale, weights }, k, p)
  }
  throw new CoreError('no_convergence', `huberRegression did not settle in ${MAX_STEPS} steps`)
}

function weightedFit(x: Design, y: ArrayLike<number>, weights: Float64Array, p: number): Float64Array {
  const roots = weights.map(Math.sqrt)
  return qr(scaledRows(x, roots), p).solve(roots.map((w, i) => w * y[i]!))
}

type Core = Pick<HuberFit, 'coefficients' | 'residuals' | 'scale' | 'weights'>

function finish(x: Design, fit: Core, k: number, p: number): HuberFit {
  if (fit.scale === 0) return { ...fit, standardErrors: new Float64Array(p), sandwichErrors: new Float64Array(p) }
  const psi = fit.residuals.map((r, i) => fit.weights[i]! * r)
  return { ...fit, standardErrors: classicErrors(x, fit, psi, k, p), sandwichErrors: sandwich(x, fit, psi, k, p) }
}

/** Huber's H1 with the small-sample factor κ: κ² Σψ²/(n − p) / m² (XᵀX)⁻¹, m the share of rows within k scales. */
function classicErrors(x: Design, fit: Core, psi: Float64Array, k: number, p: number): Float64Array | null {
  const n = psi.length
  if (n <= p) return null
  const inside = fit.residuals.map((r) => (Math.abs(r) <= k * fit.scale ? 1 : 0))
  const m = inside.reduce((a, b) => a + b, 0) / n
  if (m === 0) return null
  const spread = inside.reduce((sum, v) => sum + (v - m) ** 2, 0) / (n - 1)
  const kappa = 1 + (p * spread) / (n * m * m)
  const sigma = Math.sqrt(psi.reduce((sum, v) => sum + v * v, 0) / (n - p)) * (kappa / m)
  return Float64Array.from(qr(x, p).inverseGram(), (row, j) => sigma * Math.sqrt(row[j]!))
}

/**
 * (XᵀDX)⁻¹ Xᵀψ²X (XᵀDX)⁻¹ with D the derivative of ψ: 1 within k scales, 0 outside. When the rows inside do not
 * determine every coefficient, the weights stand in for D.
 */
function sandwich(x: Design, fit: Core, psi: Float64Array, k: number, p: number): Float64Array {
  const inside = fit.residuals.map((r) => (Math.abs(r) <= k * fit.scale ? 1 : 0))
  let bread: Float64Array[]
  try {
    bread = qr(scaledRows(x, inside), p).inverseGram()
  } catch (error) {
    if (!(error instanceof CoreError && error.code === 'singular')) throw error
    bread = qr(scaledRows(x, fit.weights.map(Math.sqrt)), p).inverseGram()
  }
  const variances = new Float64Array(p)
  for (let i = 0; i < x.length; i++) {
    for (let j = 0; j < p; j++) {
      let pull = 0
      for (let l = 0; l < p; l++) pull += bread[j]![l]! * x[i]![l]!
      variances[j]! += (pull * psi[i]!) ** 2
    }
  }
  return variances.map(Math.sqrt)
}
