import { CoreError } from '../errors.ts'
import { requireRange } from './checks.ts'
import { gammaRegularised } from './gamma-regularised.ts'
import { logGamma } from './log-gamma.ts'
import { logPoissonPmf } from './poisson-pmf.ts'

/**
 * Quantile of the gamma distribution: the x with P(X <= x) = p. With `tail` 'upper', the x with P(X > x) = p,
 * which keeps its digits for tiny p. `rate` is one over the scale; x has the inverse unit of the rate.
 *
 * Newton's method on ln(tail probability) against ln x, where both tails are nearly straight, kept inside a bracket
 * that shrinks by halving whenever a step would leave it. p = 0 and p = 1 give the ends, 0 and Infinity.
 *
 * @throws {CoreError} out_of_range, no_convergence
 * @see Best & Roberts (1975), Algorithm AS 91, for the starting values (Wilson & Hilferty 1931 and the small-x limit)
 */
export function gammaQuantile(p: number, shape: number, rate = 1, tail: 'lower' | 'upper' = 'lower'): number {
  requireRange('gammaQuantile', p >= 0 && p <= 1, 'a probability from 0 to 1', p)
  requireRange('gammaQuantile', shape > 0 && shape < Number.POSITIVE_INFINITY, 'a finite shape above 0', shape)
  requireRange('gammaQuantile', rate > 0 && rate < Number.POSITIVE_INFINITY, 'a finite rate above 0', rate)
  if (p === 0) return tail === 'lower' ? 0 : Number.POSITIVE_INFINITY
  if (p === 1) return tail === 'lower' ? Number.POSITIVE_INFINITY : 0
  // Work on the smaller tail: its relative error is the one that matters.
  const useLower = (tail === 'lower') === p < 0.5
  const small = p < 0.5 ? p : 1 - p
  return Math.exp(solve(small, shape, useLower)) / rate
}

/** ln x where the named tail of Gamma(shape, 1) has probability `target` (at most a half). */
function solve(target: number, shape: number, lower: boolean): number {
  const logTarget = Math.log(target)
  // x^a / Γ(a + 1) bounds P(a, x) from above, so the solution lies to the right of where that equals the target.
  const smallX = ((lower ? logTarget : Math.log(0.5)) + logGamma(shape + 1)) / shape
  let low = smallX - 1
  let high = Math.log(shape + 50 * Math.sqrt(shape) + 800)
  let u = Math.min(high, Math.max(low, start(target, shape, lower, smallX)))
  for (let step = 0; step < 200; step++) {
    const x = Math.exp(u)
    // Below the smallest double the lower tail is its leading term exactly.
    if (x === 0) return smallX
    const tails = gammaRegularised(shape, x)
    const tail = lower ? tails.lower : tails.upper
    const excess = Math.log(tail) - logTarget
    if (lower === excess > 0) high = u
    else low = u
    // d ln(tail) / d ln x = ± density · x / tail, and density · x = shape · x^a e^−x / Γ(a + 1).
    const slope = shape * Math.exp(logPoissonPmf(shape, x) - Math.log(tail)) * (lower ? 1 : -1)
    let next = u - excess / slope
    if (!(next > low && next < high)) next = (low + high) / 2
    if (Math.abs(next - u) <= 1e-15 * Math.max(1, Math.abs(u)) || high - low <= 1e-15 * Math.max(1, Math.abs(u)))
      return next
    u = next
  }
  throw new CoreError('no_convergence', `gammaQuantile: tail ${target}, shape ${shape}`)
}

function start(target: number, shape: number, lower: boolean, smallX: number): number {
  if (shape < 1 && lower) return smallX
  // A rough normal quantile is enough for a start: Hastings' formula, Abramowitz & Stegun 26.2.22.
  const t = Math.sqrt(-2 * Math.log(target))
  const z = (t - (2.30753 + 0.27061 * t) / (1 + 0.99229 * t + 0.04481 * t * t)) * (lower ? -1 : 1)
  const root = 1 - 1 / (9 * shape) + z / (3 * Math.sqrt(shape))
  return root > 0.05 ? Math.log(shape) + 3 * Math.log(root) : smallX
}
