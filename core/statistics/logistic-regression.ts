import { requireEventCount, requireFinite, requireRange, requireSameLength } from './checks.ts'
import { type Design, dot, requireDesign } from './design.ts'
import { logChoose } from './log-choose.ts'
import { addOuter, columnReach, type Fit, fitOf, type Likelihood, maximise, squareZeros } from './maximise.ts'

export interface LogisticFit extends Fit {
  /** Twice the log likelihood lost against a perfect fit. */
  readonly deviance: number
}

/**
 * Logistic regression by maximum likelihood. `events` are 0 or 1, or counts out of `trials`. Coefficients are log odds ratios; put a
 * column of ones for the intercept. When a combination of columns separates events from the rest no maximum exists: it
 * says `no_convergence`, and {@link firthLogistic} is the way.
 *
 * @throws {CoreError} too_few_values, unequal_lengths, not_finite, out_of_range, singular, no_convergence
 * @see McCullagh & Nelder (1989), Generalized Linear Models, 2nd ed., chapter 4; Albert & Anderson (1984), Biometrika 71, 1-10
 */
export function logisticRegression(
  x: Design,
  events: ArrayLike<number>,
  options: { readonly trials?: ArrayLike<number>; readonly offset?: ArrayLike<number> } = {},
): LogisticFit {
  const { trials, offset } = options
  const p = requireDesign('logisticRegression', x, events)
  const size = (i: number): number => (trials ? trials[i]! : 1)
  if (trials) requireSameLength('logisticRegression', events, trials)
  if (offset) {
    requireSameLength('logisticRegression', events, offset)
    requireFinite('logisticRegression', offset)
  }
  let constant = 0
  let perfect = 0
  for (let i = 0; i < events.length; i++) {
    requireEventCount('logisticRegression', events[i]!)
    requireRange(
      'logisticRegression',
      Number.isSafeInteger(size(i)) && size(i) >= events[i]!,
      'whole trials, at least the events',
      size(i),
    )
    constant += logChoose(size(i), events[i]!)
    perfect += xLogX(events[i]!, size(i)) + xLogX(size(i) - events[i]!, size(i))
  }
  const at = (b: Float64Array): Likelihood => {
    const gradient = new Float64Array(p)
    const information = squareZeros(p)
    let value = 0
    for (let i = 0; i < events.length; i++) {
      const eta = dot(x[i]!, b) + (offset ? offset[i]! : 0)
      const { chance, rest, weight, logOdds } = logistic(eta)
      value += events[i]! * eta - size(i) * logOdds
      // events − size · chance, without losing the last digits where chance rounds to 1.
      const residual = events[i]! * rest - (size(i) - events[i]!) * chance
      for (let j = 0; j < p; j++) gradient[j]! += residual * x[i]![j]!
      addOuter(information, x[i]!, size(i) * weight)
    }
    return { value, gradient, information }
  }
  const { b, likelihood } = maximise('logisticRegression', at, new Float64Array(p), columnReach(x, p))
  const fit = fitOf(b, likelihood)
  return {
    ...fit,
    logLikelihood: likelihood.value + constant,
    deviance: Math.max(0, 2 * (perfect - likelihood.value)),
  }
}

/** Probability, its complement, its derivative and ln(1 + e^η), each without overflow. */
export function logistic(eta: number): { chance: number; rest: number; weight: number; logOdds: number } {
  const e = Math.exp(-Math.abs(eta))
  const small = e / (1 + e)
  return {
    chance: eta >= 0 ? 1 / (1 + e) : small,
    rest: eta >= 0 ? small : 1 / (1 + e),
    weight: small / (1 + e),
    logOdds: Math.max(0, eta) + Math.log1p(e),
  }
}

function xLogX(x: number, n: number): number {
  return x === 0 ? 0 : x * Math.log(x / n)
}
