import { requireEventCount, requireFinite, requireSameLength } from './checks.ts'
import { type Design, dot, requireDesign } from './design.ts'
import { logGamma } from './log-gamma.ts'
import { addOuter, columnReach, type Fit, fitOf, type Likelihood, maximise, squareZeros } from './maximise.ts'

export interface PoissonFit extends Fit {
  /** Twice the log likelihood lost against a perfect fit. */
  readonly deviance: number
  /** Σ (count − expected)² / expected; over the degrees of freedom it is the dispersion, near 1 for Poisson counts. */
  readonly pearsonChi2: number
  readonly degreesOfFreedom: number
}

/**
 * Poisson regression with log link by maximum likelihood. `offset` is the logarithm of each row's exposure; coefficients are log rate
 * ratios; put a column of ones for the intercept. A column that holds no event has no finite estimate: `no_convergence`.
 *
 * @throws {CoreError} too_few_values, unequal_lengths, not_finite, out_of_range, singular, no_convergence
 * @see McCullagh & Nelder (1989), Generalized Linear Models, 2nd ed., chapter 6
 */
export function poissonRegression(
  x: Design,
  counts: ArrayLike<number>,
  options: { readonly offset?: ArrayLike<number> } = {},
): PoissonFit {
  const { offset } = options
  const p = requireDesign('poissonRegression', x, counts)
  const n = counts.length
  if (offset) {
    requireSameLength('poissonRegression', counts, offset)
    requireFinite('poissonRegression', offset)
  }
  let constant = 0
  let events = 0
  let exposure = 0
  for (let i = 0; i < n; i++) {
    requireEventCount('poissonRegression', counts[i]!)
    constant -= logGamma(counts[i]! + 1)
    events += counts[i]!
    exposure += Math.exp(offset ? offset[i]! : 0)
  }
  // The intercept starts at the overall rate, so that the first step is a small one.
  const centre = Math.log(Math.max(events, 0.5) / exposure)
  const etaOf = (i: number, b: Float64Array): number => dot(x[i]!, b) + (offset ? offset[i]! : 0)
  const at = (b: Float64Array): Likelihood => {
    const gradient = new Float64Array(p)
    const information = squareZeros(p)
    let value = 0
    for (let i = 0; i < n; i++) {
      const eta = etaOf(i, b)
      const mean = Math.exp(eta)
      value += counts[i]! * eta - mean
      for (let j = 0; j < p; j++) gradient[j]! += (counts[i]! - mean) * x[i]![j]!
      addOuter(information, x[i]!, mean)
    }
    return { value, gradient, information }
  }
  const start = startNear(x, p, centre)
  const { b, likelihood } = maximise('poissonRegression', at, start, columnReach(x, p))
  let deviance = 0
  let pearsonChi2 = 0
  for (let i = 0; i < n; i++) {
    const mean = Math.exp(etaOf(i, b))
    deviance += 2 * ((counts[i]! === 0 ? 0 : counts[i]! * Math.log(counts[i]! / mean)) - (counts[i]! - mean))
    pearsonChi2 += (counts[i]! - mean) ** 2 / mean
  }
  const fit = fitOf(b, likelihood)
  return { ...fit, logLikelihood: likelihood.value + constant, deviance, pearsonChi2, degreesOfFreedom: n - p }
}

/** Starts an intercept column at the overall log rate; without one at 0. */
function startNear(x: Design, p: number, centre: number): Float64Array {
  const start = new Float64Array(p)
  for (let j = 0; j < p; j++) {
    if (Array.from(x).every((row) => row[j] === 1)) {
      start[j] = centre
      break
    }
  }
  return start
}
