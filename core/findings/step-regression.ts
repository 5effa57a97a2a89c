import tQuantile from '@stdlib/stats-base-dists-t-quantile'
import { medianInPlace } from './levels.ts'
import type { StepRow, StepRows } from './step-rows.ts'

/** 1.345 keeps 95 % efficiency at normal errors (Huber 1964; Huber 1981). */
const HUBER_K = 1.345
const MAD_TO_SIGMA = 1.4826
/** The pooled wander counts like this many switchings when an own spread is mixed with it. */
const POOLED_WEIGHT = 4
/** Sandwiches of a few dozen rows run short; measured on made-up logs with known steps (tests of the budget). */
const SMALL_SAMPLE = 1.15

/** What switching one thing changes, mA. */
export interface StepEstimate {
  readonly ma: number
  /** Half-width of the 90 % interval. */
  readonly half: number
  readonly switchings: number
  /** Positions of the things that the data cannot tell from this one; then `ma` says nothing. */
  readonly inseparable: readonly number[]
}

/**
 * Regression of level differences on state differences with Huber weights, one coefficient a thing. Standard errors are
 * the larger of a sandwich with leverage correction (HC3: MacKinnon & White 1985) and one that allows for the level shared by neighbouring
 * rows (Newey & West 1987, lag 1), mixed with the wander of the level where nothing was switched, so that two or three switchings do
 * not feign agreement. Key: position of the thing. O(rows × iterations + things³).
 */
export function stepRegression(rows: StepRows, leastScale: number): Map<number, StepEstimate> {
  const { steps } = rows
  const columns = [...new Set(steps.flatMap((row) => row.things))].sort((a, b) => a - b)
  const position = new Map(columns.map((thing, j) => [thing, j]))
  const design: Design = {
    p: columns.length,
    index: steps.map((row) => row.things.map((thing) => position.get(thing)!)),
    signs: steps.map((row) => row.signs),
    y: Float64Array.from(steps, (row) => row.ma),
  }
  const { basis, partners } = separability(design)
  const fit = huberFit(design, basis, Math.max(wanderOf(rows, basis.length), leastScale))
  const estimates = new Map<number, StepEstimate>()
  columns.forEach((thing, j) => {
    const switchings = design.index.filter((row) => row.includes(j)).length
    const inseparable = partners[j]!.map((k) => columns[k]!)
    const b = basis.indexOf(j)
    if (inseparable.length > 0 || b < 0) {
      estimates.set(thing, { ma: Number.NaN, half: Number.NaN, switchings, inseparable })
      return
    }
    const own = Math.max(0, switchings - 1)
    const variance = (POOLED_WEIGHT * fit.pooled[b]! + own * fit.own[b]!) / (POOLED_WEIGHT + own)
    const half = SMALL_SAMPLE * tQuantile(0.95, POOLED_WEIGHT + own) * Math.sqrt(variance)
    estimates.set(thing, { ma: fit.coefficients[b]!, half, switchings, inseparable })
  })
  return estimates
}

interface Design {
  readonly p: number
  readonly index: readonly (readonly number[])[]
  readonly signs: readonly (readonly number[])[]
  readonly y: Float64Array
}

/**
 * How much a level differs from the next of itself, as a standard deviation. Where there is hardly a place without
 * switching to see it, a fifth of the usual step stands in, so that a figure without a second look never seems exact.
 */
function wanderOf({ steps, placebos }: StepRows, coefficients: number): number {
  if (placebos.length >= 5) return spread(placebos)
  const seen = placebos.length === 0 ? 0 : Math.max(...placebos.map((row) => Math.abs(row.ma)))
  return steps.length > coefficients + 3 || steps.length === 0 ? seen : Math.max(seen, 0.2 * spread(steps))
}

function spread(rows: readonly StepRow[]): number {
  return MAD_TO_SIGMA * medianInPlace(Float64Array.from(rows, (row) => Math.abs(row.ma)))
}

interface Fit {
  readonly coefficients: Float64Array
  /** Variances by the wander of the level, and by the residuals of the rows themselves. */
  readonly pooled: Float64Array
  readonly own: Float64Array
}

function huberFit(design: Design, basis: readonly number[], leastScale: number): Fit {
  const m = basis.length
  const n = design.y.length
  const at = new Map(basis.map((j, b) => [j, b]))
  const index = design.index.map((row) => row.map((j) => at.get(j) ?? -1))
  const weights = new Float64Array(n).fill(1)
  const residuals = new Float64Array(n)
  let coefficients: Float64Array = new Float64Array(m)
  let inverse: Float64Array = new Float64Array(m * m)
  let scale = leastScale
  for (let iteration = 0; iteration < 30; iteration++) {
    inverse = inverted(gram(index, design.signs, weights, m), m)
    const next = product(inverse, moments(index, design, weights, m), m)
    let moved = 0
    for (let b = 0; b < m; b++) moved = Math.max(moved, Math.abs(next[b]! - coefficients[b]!))
    coefficients = next
    for (let i = 0; i < n; i++) residuals[i] = design.y[i]! - fitted(index[i]!, design.signs[i]!, coefficients)
    scale = Math.max(leastScale, residualScale(residuals, m))
    if (scale === 0) break
    for (let i = 0; i < n; i++) weights[i] = Math.min(1, (HUBER_K * scale) / Math.max(1e-12, Math.abs(residuals[i]!)))
    if (moved < 1e-7 && iteration > 2) break
  }
  const pooled = new Float64Array(m)
  // Neighbouring rows share a level: for a thing that goes on and off in turn the variance is half as large again.
  for (let b = 0; b < m; b++) pooled[b] = 1.5 * scale * scale * inverse[b * m + b]!
  return { coefficients, pooled, own: sandwich(index, design.signs, weights, residuals, inverse, m) }
}

/** Scaled median of the residuals' sizes, n / (n − m) larger for what the fit used up; 0 when it used up all. */
function residualScale(residuals: Float64Array, m: number): number {
  const n = residuals.length
  if (n <= m) return 0
  const sizes = residuals.map(Math.abs)
  return MAD_TO_SIGMA * medianInPlace(sizes) * Math.sqrt(n / (n - m))
}

function sandwich(
  index: readonly (readonly number[])[],
  signs: readonly (readonly number[])[],
  weights: Float64Array,
  residuals: Float64Array,
  inverse: Float64Array,
  m: number,
): Float64Array {
  const plain = new Float64Array(m)
  const lagged = new Float64Array(m)
  let previous = new Float64Array(m)
  for (let i = 0; i < index.length; i++) {
    const influence = new Float64Array(m)
    let leverage = 0
    index[i]!.forEach((b, k) => {
      if (b < 0) return
      for (let c = 0; c < m; c++) influence[c]! += inverse[c * m + b]! * signs[i]![k]!
    })
    index[i]!.forEach((b, k) => {
      if (b >= 0) leverage += influence[b]! * signs[i]![k]! * weights[i]!
    })
    const size = (weights[i]! * residuals[i]!) / Math.max(0.1, 1 - leverage)
    for (let c = 0; c < m; c++) {
      influence[c]! *= size
      plain[c]! += influence[c]! ** 2
      lagged[c]! += 2 * influence[c]! * previous[c]!
    }
    previous = influence
  }
  return plain.map((v, b) => Math.max(v, v + lagged[b]!))
}

function fitted(index: readonly number[], signs: readonly number[], coefficients: Float64Array): number {
  let sum = 0
  for (let k = 0; k < index.length; k++) if (index[k]! >= 0) sum += signs[k]! * coefficients[index[k]!]!
  return sum
}

function gram(
  index: readonly (readonly number[])[],
  signs: readonly (readonly number[])[],
  weights: Float64Array | null,
  m: number,
): Float64Array {
  const g = new Float64Array(m * m)
  for (let i = 0; i < index.length; i++) {
    const row = index[i]!
    for (let k = 0; k < row.length; k++) {
      if (row[k]! < 0) continue
      for (let l = 0; l < row.length; l++) {
        if (row[l]! >= 0) g[row[k]! * m + row[l]!]! += (weights?.[i] ?? 1) * signs[i]![k]! * signs[i]![l]!
      }
    }
  }
  return g
}

function moments(
  index: readonly (readonly number[])[],
  design: Design,
  weights: Float64Array,
  m: number,
): Float64Array {
  const v = new Float64Array(m)
  for (let i = 0; i < index.length; i++) {
    index[i]!.forEach((b, k) => {
      if (b >= 0) v[b]! += weights[i]! * design.signs[i]![k]! * design.y[i]!
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

/**
 * Which columns make a basis, and for each column the others it can be traded against without changing a single row:
 * its coefficient is then not determined. Exact, for the Gram matrix holds small whole numbers.
 */
function separability(design: Design): { basis: number[]; partners: number[][] } {
  const { p } = design
  const a = gram(design.index, design.signs, null, p)
  const tolerance = 1e-9 * Math.max(1, design.y.length)
  const pivots: number[] = []
  let row = 0
  for (let column = 0; column < p && row < p; column++) {
    let best = row
    for (let r = row + 1; r < p; r++) if (Math.abs(a[r * p + column]!) > Math.abs(a[best * p + column]!)) best = r
    if (Math.abs(a[best * p + column]!) <= tolerance) continue
    for (let c = 0; c < p; c++) {
      const held = a[row * p + c]!
      a[row * p + c] = a[best * p + c]!
      a[best * p + c] = held
    }
    const scale = a[row * p + column]!
    for (let c = 0; c < p; c++) a[row * p + c]! /= scale
    for (let r = 0; r < p; r++) {
      const factor = a[r * p + column]!
      if (r === row || factor === 0) continue
      for (let c = 0; c < p; c++) a[r * p + c]! -= factor * a[row * p + c]!
    }
    pivots.push(column)
    row++
  }
  const partners: Set<number>[] = Array.from({ length: p }, () => new Set())
  for (let free = 0; free < p; free++) {
    if (pivots.includes(free)) continue
    // The null vector of this free column: itself, and what its row entries ask of the pivots.
    const members = [free, ...pivots.filter((_, r) => Math.abs(a[r * p + free]!) > 1e-6)]
    for (const j of members) for (const k of members) if (j !== k) partners[j]!.add(k)
  }
  return { basis: pivots, partners: partners.map((set) => [...set].sort((x, y) => x - y)) }
}
