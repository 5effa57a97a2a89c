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

type Method = 'exact' | 'laplace' | 'by-cost'

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
  method: Method = 'by-cost',
): Marginal {
  return marginals(hours, trips, [causes], method)[0]!
}

/** `marginal` of the same causes measured in several ways; ways that share their weights share most of the work. */
export function marginals(
  hours: number,
  trips: number,
  ways: readonly (readonly CauseWindow[])[],
  method: Method = 'by-cost',
): Marginal[] {
  let before: readonly CauseWindow[] = []
  let expansion: Expansion | null = null
  return ways.map((causes) => {
    const priors = priorsOf(hours, trips, causes)
    if (causes.length === 0) return { log: gammaIntegrals(priors[0]!, trips)[trips]!, expected: [] }
    if (expansion === null || !causes.every((c, j) => c.weights === before[j]?.weights)) {
      const touched: number[] = []
      const weights = causes.map((c) => c.weights)
      for (let i = 0; i < trips; i++) if (weights.some((w) => w[i]! > 0)) touched.push(i)
      const isCostly = touched.length > EXACT_TRIPS[causes.length]!
      if (method === 'laplace' || (method === 'by-cost' && isCostly)) return laplace(trips, causes, priors)
      expansion = expansionOf(causes, touched)
      before = causes
    }
    return exact(
      trips,
      expansion,
      priors.map((p) => gammaIntegrals(p, trips)),
    )
  })
}

function priorsOf(hours: number, trips: number, causes: readonly CauseWindow[]): Prior[] {
  const seen = Math.max(1, trips)
  const priors: Prior[] =
    causes.length === 0
      ? [{ shape: 1, rate: hours / seen, hours }]
      : [{ shape: BACKGROUND_SHAPE, rate: (BACKGROUND_SHAPE * hours) / (BACKGROUND_SHARE * seen), hours }]
  for (const c of causes) priors.push({ shape: CAUSE_SHAPE, rate: (CAUSE_SHAPE * c.hours) / seen, hours: c.hours })
  return priors
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

/** The product over trips of (1 + Σ wᵢⱼ xⱼ), expanded: what does not depend on how long anything was exposed. */
interface Expansion {
  /** ln of the coefficient of x₁^k₁ x₂^k₂ …, at k₁ + side k₂ + side² k₃; −∞ where it is none. */
  readonly logs: Float64Array
  readonly side: number
  /** ln of what was divided out on the way. */
  readonly scale: number
}

function expansionOf(causes: readonly CauseWindow[], touched: readonly number[]): Expansion {
  const m = causes.length
  const side = touched.length + 1
  const size = side ** m
  const coefficients = new Float64Array(size)
  coefficients[0] = 1
  const weights = causes.map((c) => c.weights)
  const stride = causes.map((_, j) => side ** j)
  let scale = 0
  for (let done = 0; done < touched.length; done++) {
    const trip = touched[done]!
    let sum = 1
    for (const w of weights) sum += w[trip]!
    scale += Math.log(sum)
    if (m === 1) multiplyByOne(coefficients, done + 1, weights[0]![trip]!, sum)
    else {
      const top = Math.min(size - 1, (done + 1) * stride[m - 1]! + stride[m - 1]! - 1)
      multiplyBy(coefficients, top, side, stride, weights, trip, sum)
    }
  }
  const logs = new Float64Array(size)
  for (let at = 0; at < size; at++) {
    const c = coefficients[at]!
    logs[at] = c > 0 ? Math.log(c) : Number.NEGATIVE_INFINITY
  }
  return { logs, side, scale }
}

/** Multiplies a polynomial in one unknown by (1 + w x) / sum, in place. */
function multiplyByOne(coefficients: Float64Array, top: number, w: number, sum: number): void {
  for (let at = top; at > 0; at--) coefficients[at] = (coefficients[at]! + w * coefficients[at - 1]!) / sum
  coefficients[0] = coefficients[0]! / sum
}

/** The same in two or three unknowns. */
function multiplyBy(
  coefficients: Float64Array,
  top: number,
  side: number,
  stride: readonly number[],
  weights: readonly Float64Array[],
  trip: number,
  sum: number,
): void {
  const m = weights.length
  for (let at = top; at >= 0; at--) {
    let value = coefficients[at]!
    let rest = at
    for (let j = 0; j < m; j++) {
      if (rest % side > 0) value += weights[j]![trip]! * coefficients[at - stride[j]!]!
      rest = Math.trunc(rest / side)
    }
    coefficients[at] = value / sum
  }
}

function exact(
  trips: number,
  { logs: expanded, side, scale }: Expansion,
  integrals: readonly Float64Array[],
): Marginal {
  const m = integrals.length - 1
  const size = expanded.length
  const [background] = integrals
  const logs = new Float64Array(size)
  let largest = Number.NEGATIVE_INFINITY
  for (let at = 0; at < size; at++) {
    let log = expanded[at]!
    if (log > Number.NEGATIVE_INFINITY) {
      let used = 0
      let rest = at
      for (let j = 1; j <= m; j++) {
        const digit = rest % side
        used += digit
        log += integrals[j]![digit]!
        rest = Math.trunc(rest / side)
      }
      log += background![trips - used]!
      if (log > largest) largest = log
    }
    logs[at] = log
  }
  let total = 0
  const expected = new Array<number>(m).fill(0)
  for (let at = 0; at < size; at++) {
    const weight = Math.exp(logs[at]! - largest)
    total += weight
    let rest = at
    for (let j = 0; j < m; j++) {
      expected[j]! += weight * (rest % side)
      rest = Math.trunc(rest / side)
    }
  }
  return { log: largest + Math.log(total) + scale, expected: expected.map((e) => e / total) }
}

function laplace(trips: number, causes: readonly CauseWindow[], priors: readonly Prior[]): Marginal {
  const n = priors.length
  // rows of weights by trip, the background's 1 first
  const weights = new Float64Array(trips * n).fill(1)
  causes.forEach((c, j) => {
    for (let i = 0; i < trips; i++) weights[i * n + j + 1] = c.weights[i]!
  })
  const rates = Float64Array.from(priors, (p) => (p.shape + trips / n) / (p.rate + p.hours))
  const made = new Float64Array(n)
  for (let round = 0; round < 500; round++) {
    made.fill(0)
    for (let at = 0; at < weights.length; at += n) {
      let sum = 0
      for (let j = 0; j < n; j++) sum += weights[at + j]! * rates[j]!
      for (let j = 0; j < n; j++) made[j]! += (weights[at + j]! * rates[j]!) / sum
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
  for (let at = 0; at < weights.length; at += n) {
    let sum = 0
    for (let j = 0; j < n; j++) sum += weights[at + j]! * rates[j]!
    log += Math.log(sum)
    for (let j = 0; j < n; j++) {
      for (let k = 0; k < n; k++)
        curvature[j]![k]! += (weights[at + j]! * rates[j]! * weights[at + k]! * rates[k]!) / (sum * sum)
    }
  }
  priors.forEach((p, j) => {
    log +=
      p.shape * Math.log(p.rate) - logGamma(p.shape) + p.shape * Math.log(rates[j]!) - (p.rate + p.hours) * rates[j]!
  })
  return { log: log - 0.5 * logDeterminant(curvature), expected: [...made.subarray(1)] }
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
