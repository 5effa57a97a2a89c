import { CoreError } from '../errors.ts'
import { requireRange } from './checks.ts'
import { chiSquaredUpperTail } from './chi-squared.ts'
import { cholesky } from './cholesky.ts'
import { type Design, dot, requireDesign } from './design.ts'
import { gammaQuantile } from './gamma-quantile.ts'
import { logistic } from './logistic-regression.ts'
import { addOuter, columnReach, type Fit, fitOf, type Likelihood, maximise, squareZeros } from './maximise.ts'

export interface FirthFit extends Fit {
  /** Log likelihood plus half the log determinant of the information; `logLikelihood` is the plain one. */
  readonly penalisedLogLikelihood: number
  /** Penalised likelihood-ratio test of each coefficient. */
  readonly chi2: Float64Array
  readonly p: Float64Array
  /** Profile limits of each coefficient; infinite where the profile never falls far enough. */
  readonly low: Float64Array
  readonly high: Float64Array
}

/**
 * Firth's logistic regression: maximum likelihood with Jeffreys' prior as penalty. Estimates stay finite when a cell is empty or the data
 * are separated, and small-sample bias is gone to first order. Tests and limits come from the penalised profile.
 *
 * @throws {CoreError} too_few_values, unequal_lengths, not_finite, out_of_range, singular, no_convergence
 * @see Firth (1993), Biometrika 80, 27-38; Heinze & Schemper (2002), Statistics in Medicine 21, 2409-2419
 */
export function firthLogistic(
  x: Design,
  events: ArrayLike<number>,
  options: { readonly confidence?: number } = {},
): FirthFit {
  const { confidence = 0.95 } = options
  const p = requireDesign('firthLogistic', x, events)
  for (let i = 0; i < events.length; i++) {
    requireRange('firthLogistic', events[i] === 0 || events[i] === 1, 'events of 0 or 1', events[i])
  }
  const reach = columnReach(x, p)
  const at = (b: Float64Array): Likelihood => penalisedAt(x, events, b)
  const free = maximise('firthLogistic', at, new Float64Array(p), reach)
  const fit = fitOf(free.b, free.likelihood)
  const top = free.likelihood.value

  /** Penalised profile: the maximum with coefficient j held at v; the penalty keeps the whole design. */
  const profile = (j: number, v: number, from: Float64Array): { value: number; b: Float64Array } => {
    const full = (rest: Float64Array): Float64Array => {
      const b = new Float64Array(p)
      for (let i = 0; i < p; i++) b[i] = i === j ? v : rest[i < j ? i : i - 1]!
      return b
    }
    if (p === 1) return { value: at(full(new Float64Array(0))).value, b: full(new Float64Array(0)) }
    const without = <T>(list: ArrayLike<T>): T[] => Array.from(list).filter((_, i) => i !== j)
    const held = (rest: Float64Array): Likelihood => {
      const l = at(full(rest))
      return {
        value: l.value,
        gradient: Float64Array.from(without(l.gradient)),
        information: without(l.information).map((row) => Float64Array.from(without(row))),
      }
    }
    const found = maximise('firthLogistic', held, Float64Array.from(without(from)), without(reach))
    return { value: found.likelihood.value, b: full(found.b) }
  }

  const drop = gammaQuantile(confidence, 0.5, 0.5) / 2
  const limit = (j: number, direction: -1 | 1): number => {
    const error = fit.standardErrors[j]!
    let inside = free.b[j]!
    let path = free.b
    let width = error
    let outside = inside + direction * width
    // Widen until the profile has fallen far enough.
    for (;;) {
      const there = profile(j, outside, path)
      if (top - there.value >= drop) break
      if (width > 200 * error) return direction * Number.POSITIVE_INFINITY
      path = there.b
      inside = outside
      width *= 2
      outside = inside + direction * width
    }
    while (Math.abs(outside - inside) > 1e-9 * Math.max(error, Math.abs(inside))) {
      const middle = (inside + outside) / 2
      const there = profile(j, middle, path)
      if (top - there.value >= drop) outside = middle
      else {
        inside = middle
        path = there.b
      }
    }
    return (inside + outside) / 2
  }

  const chi2 = free.b.map((_, j) => Math.max(0, 2 * (top - profile(j, 0, free.b).value)))
  return {
    ...fit,
    logLikelihood: top - 0.5 * cholesky(free.likelihood.information).logDeterminant,
    penalisedLogLikelihood: top,
    chi2,
    p: chi2.map((c) => chiSquaredUpperTail(c, 1)),
    low: free.b.map((_, j) => limit(j, -1)),
    high: free.b.map((_, j) => limit(j, 1)),
  }
}

/** Penalised log likelihood, Firth's modified score Σ (y − π + h (½ − π)) x and the information. */
function penalisedAt(x: Design, events: ArrayLike<number>, b: Float64Array): Likelihood {
  const p = b.length
  const information = squareZeros(p)
  const parts = Array.from(x, (row) => logistic(dot(row, b)))
  parts.forEach((part, i) => {
    addOuter(information, x[i]!, part.weight)
  })
  let factored: ReturnType<typeof cholesky>
  try {
    factored = cholesky(information)
  } catch (error) {
    // Far out the information vanishes: as unlikely as can be, so that the step is halved.
    if (!(error instanceof CoreError && error.code === 'singular') || b.every((v) => v === 0)) throw error
    return { value: Number.NEGATIVE_INFINITY, gradient: new Float64Array(p), information }
  }
  const inverse = factored.inverse()
  const gradient = new Float64Array(p)
  let value = 0.5 * factored.logDeterminant
  parts.forEach((part, i) => {
    const row = x[i]!
    value += events[i]! * dot(row, b) - part.logOdds
    let leverage = 0
    for (let j = 0; j < p; j++) leverage += row[j]! * dot(inverse[j]!, row)
    leverage *= part.weight
    const pull = (events[i] === 1 ? part.rest : -part.chance) + leverage * (0.5 - part.chance)
    for (let j = 0; j < p; j++) gradient[j]! += pull * row[j]!
  })
  return { value, gradient, information }
}
