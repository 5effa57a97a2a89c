import { logGamma } from '../statistics/log-gamma.ts'

/** What the likelihood needs of one cause. */
export interface CauseWindow {
  /** Exposed energised hours, > 0. */
  readonly hours: number
  /**
   * Per trip: the chance of this trip under the cause over its chance under the background, both per unit of
   * intensity. 0 outside the exposure, 1 inside, a share for a trip known only as an interval, times whatever the
   * leakage before the trip says for this cause.
   */
  readonly weights: Float64Array
}

export interface Marginal {
  /** Natural log of the marginal likelihood. */
  readonly log: number
  /** Expected number of trips each cause made, in order. */
  readonly expected: readonly number[]
}

/**
 * Priors. A cause is expected to make about as many trips as were seen (gamma of shape 1: one trip's worth of
 * information). Beside a cause the background is expected to make a fifth of them, without one all.
 */
const CAUSE_SHAPE = 1
const BACKGROUND_SHAPE = 0.5
const BACKGROUND_SHARE = 0.2

/** Above this many trips touched by two or more causes the exact sum gives way to Laplace's approximation. */
const EXACT_TRIPS = [Number.POSITIVE_INFINITY, 400, 40, 22] as const

interface Prior {
  readonly shape: number
  /** Hours: prior mean intensity is shape / rate. */
  readonly rate: number
  readonly hours: number
}

/**
 * Marginal likelihood of trips at intensity λ₀ + Σ λⱼ xⱼ(t) over `hours` of energised time, gamma priors integrated
 * out. The product over trips of (λ₀ + Σ wᵢⱼ λⱼ) is expanded by how many trips each cause made, and every term is a
 * product of gamma integrals: closed form, checked against numerical integration in the tests. For many trips and
 * several causes, Laplace's approximation in log λ at the mode found by expectation-maximisation.
 * Cost: n² for one cause, n³ for two, n⁴ for three, over the n trips that any cause touches.
 */
export function marginal(
  hours: number,
  trips: number,
  causes: readonly CauseWindow[],
  method: 'exact' | 'laplace' | 'by-cost' = 'by-cost',
): Marginal {
  const seen = Math.max(1, trips)
  const priors: Prior[] =
    causes.length === 0
      ? [{ shape: 1, rate: hours / seen, hours }]
      : [{ shape: BACKGROUND_SHAPE, rate: (BACKGROUND_SHAPE * hours) / (BACKGROUND_SHARE * seen), hours }]
  for (const c of causes) priors.push({ shape: CAUSE_SHAPE, rate: (CAUSE_SHAPE * c.hours) / seen, hours: c.hours })
  const touched: number[] = []
  for (let i = 0; i < trips; i++) if (causes.some((c) => c.weights[i]! > 0)) touched.push(i)
  const approximate = method === 'laplace' || (method === 'by-cost' && touched.length > EXACT_TRIPS[causes.length]!)
  return approximate ? laplace(trips, causes, priors) : exact(trips, causes, priors, touched)
}

/** ln Γ(shape + k) for k = 0, 1, …, kept for the two shapes in use. */
const logGammas = new Map<number, number[]>()

function logGammaAt(shape: number, k: number): number {
  let table = logGammas.get(shape)
  if (table === undefined) {
    table = []
    logGammas.set(shape, table)
  }
  for (let j = table.length; j <= k; j++) table.push(logGamma(shape + j))
  return table[k]!
}

/** ln ∫ λ^k e^(−λ hours) gamma(λ; shape, rate) dλ for k from 0 to `most`. */
function gammaIntegrals({ shape, rate, hours }: Prior, most: number): Float64Array {
  const start = shape * Math.log(rate) - logGammaAt(shape, 0)
  const slope = Math.log(rate + hours)
  const integrals = new Float64Array(most + 1)
  for (let k = 0; k <= most; k++) integrals[k] = start + logGammaAt(shape, k) - (shape + k) * slope
  return integrals
}

function exact(
  trips: number,
  causes: readonly CauseWindow[],
  priors: readonly Prior[],
  touched: readonly number[],
): Marginal {
  const m = causes.length
  const side = touched.length + 1
  const integrals = priors.map((p) => gammaIntegrals(p, trips))
  if (m === 0) return { log: integrals[0]![trips]!, expected: [] }

  // coefficients[k₁ + side k₂ + side² k₃]: of the product over trips, by how many trips each cause made
  const size = side ** m
  const coefficients = new Float64Array(size)
  coefficients[0] = 1
  const stride = causes.map((_, j) => side ** j)
  let scale = 0
  touched.forEach((trip, done) => {
    let sum = 1
    for (const c of causes) sum += c.weights[trip]!
    scale += Math.log(sum)
    const top = Math.min(size - 1, (done + 1) * stride[m - 1]! + (m > 1 ? stride[m - 1]! - 1 : 0))
    for (let at = top; at >= 0; at--) {
      let value = coefficients[at]!
      for (let j = 0; j < m; j++) {
        const digit = Math.floor(at / stride[j]!) % side
        if (digit > 0) value += causes[j]!.weights[trip]! * coefficients[at - stride[j]!]!
      }
      coefficients[at] = value / sum
    }
  })

  const logs = new Float64Array(size).fill(Number.NEGATIVE_INFINITY)
  let largest = Number.NEGATIVE_INFINITY
  for (let at = 0; at < size; at++) {
    const c = coefficients[at]!
    if (!(c > 0)) continue
    let log = Math.log(c)
    let used = 0
    for (let j = 0; j < m; j++) {
      const digit = Math.floor(at / stride[j]!) % side
      used += digit
      log += integrals[j + 1]![digit]!
    }
    log += integrals[0]![trips - used]!
    logs[at] = log
    if (log > largest) largest = log
  }
  let total = 0
  const expected = new Array<number>(m).fill(0)
  for (let at = 0; at < size; at++) {
    const weight = Math.exp(logs[at]! - largest)
    total += weight
    for (let j = 0; j < m; j++) expected[j]! += weight * (Math.floor(at / stride[j]!) % side)
  }
  return { log: largest + Math.log(total) + scale, expected: expected.map((e) => e / total) }
}

function laplace(trips: number, causes: readonly CauseWindow[], priors: readonly Prior[]): Marginal {
  const n = priors.length
  const weight = (i: number, j: number): number => (j === 0 ? 1 : causes[j - 1]!.weights[i]!)
  const rates = priors.map((p) => (p.shape + trips / n) / (p.rate + p.hours))
  const made = new Array<number>(n).fill(0)
  for (let round = 0; round < 500; round++) {
    made.fill(0)
    for (let i = 0; i < trips; i++) {
      let sum = 0
      for (let j = 0; j < n; j++) sum += weight(i, j) * rates[j]!
      for (let j = 0; j < n; j++) made[j]! += (weight(i, j) * rates[j]!) / sum
    }
    let moved = 0
    for (let j = 0; j < n; j++) {
      const next = (priors[j]!.shape + made[j]!) / (priors[j]!.rate + priors[j]!.hours)
      moved = Math.max(moved, Math.abs(next / rates[j]! - 1))
      rates[j] = next
    }
    if (moved < 1e-9) break
  }
  const curvature = priors.map((p, j) => priors.map((_, k) => (j === k ? p.shape : 0)))
  let log = (n / 2) * Math.log(2 * Math.PI)
  for (let i = 0; i < trips; i++) {
    let sum = 0
    for (let j = 0; j < n; j++) sum += weight(i, j) * rates[j]!
    log += Math.log(sum)
    for (let j = 0; j < n; j++) {
      for (let k = 0; k < n; k++)
        curvature[j]![k]! += (weight(i, j) * rates[j]! * weight(i, k) * rates[k]!) / (sum * sum)
    }
  }
  priors.forEach((p, j) => {
    log +=
      p.shape * Math.log(p.rate) - logGamma(p.shape) + p.shape * Math.log(rates[j]!) - (p.rate + p.hours) * rates[j]!
  })
  return { log: log - 0.5 * logDeterminant(curvature), expected: made.slice(1) }
}

/** Of a small positive-definite matrix, by elimination. */
function logDeterminant(matrix: readonly (readonly number[])[]): number {
  const a = matrix.map((row) => [...row])
  let log = 0
  for (let k = 0; k < a.length; k++) {
    log += Math.log(a[k]![k]!)
    for (let i = k + 1; i < a.length; i++) {
      const factor = a[i]![k]! / a[k]![k]!
      for (let j = k; j < a.length; j++) a[i]![j]! -= factor * a[k]![j]!
    }
  }
  return log
}
