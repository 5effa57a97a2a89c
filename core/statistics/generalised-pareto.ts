import { CoreError } from '../errors.ts'
import { requireCount, requireRange } from './checks.ts'
import { cholesky } from './cholesky.ts'

export interface GeneralisedPareto {
  /** Above 0 a heavy tail, 0 exponential, below 0 a tail with an end. */
  readonly shape: number
  /** In the unit of the exceedances. */
  readonly scale: number
  readonly logLikelihood: number
  /** Standard errors from the observed information; null where it is not positive definite (shape near −1/2 and below). */
  readonly shapeError: number | null
  readonly scaleError: number | null
}

/** Least shape looked for: from −1 down the likelihood has no maximum. */
const LEAST_SHAPE = -0.99

/**
 * Generalised Pareto distribution fitted to exceedances (value − threshold, above 0) by maximum likelihood, through the profile in
 * θ = shape / scale. Fewer than 5 exceedances are refused; below 30 the errors say how little is known.
 *
 * @throws {CoreError} too_few_values, out_of_range (an exceedance not above 0 or not finite), zero_spread (all equal), no_convergence
 * @see Pickands (1975), Ann. Statist. 3, 119-131; Davison & Smith (1990), J. R. Statist. Soc. B 52, 393-442
 * @see Grimshaw (1993), Technometrics 35, 185-191
 */
export function generalisedPareto(exceedances: ArrayLike<number>): GeneralisedPareto {
  const n = exceedances.length
  requireCount('generalisedPareto', n, 5)
  let mean = 0
  let most = 0
  let least = Number.POSITIVE_INFINITY
  for (let i = 0; i < n; i++) {
    const y = exceedances[i]!
    requireRange('generalisedPareto', y > 0 && y < Number.POSITIVE_INFINITY, 'finite exceedances above 0', y)
    mean += y / n
    most = Math.max(most, y)
    least = Math.min(least, y)
  }
  if (most === least) throw new CoreError('zero_spread', `generalisedPareto got ${n} equal exceedances`)
  const theta = bestTheta(exceedances, mean, most)
  const shape = shapeAt(exceedances, theta)
  const scale = theta === 0 ? mean : shape / theta
  const logLikelihood = -n * (Math.log(scale) + shape + 1)
  return { shape, scale, logLikelihood, ...errors(exceedances, shape, scale) }
}

/** Quantile of the fitted exceedances, in their unit. */
export function paretoQuantile(fit: Pick<GeneralisedPareto, 'shape' | 'scale'>, p: number): number {
  requireRange('paretoQuantile', p >= 0 && p < 1, 'a probability from 0 to below 1', p)
  const log = -Math.log1p(-p)
  return fit.shape === 0 ? fit.scale * log : (fit.scale * Math.expm1(fit.shape * log)) / fit.shape
}

/** The shape that goes with θ: the mean of ln(1 + θ y). */
function shapeAt(y: ArrayLike<number>, theta: number): number {
  let sum = 0
  for (let i = 0; i < y.length; i++) sum += Math.log1p(theta * y[i]!)
  return sum / y.length
}

/** Profile log likelihood a row, −ln(scale) − shape − 1; the scale tends to the mean as θ tends to 0. */
function profile(y: ArrayLike<number>, theta: number, mean: number): number {
  const shape = shapeAt(y, theta)
  if (shape <= LEAST_SHAPE) return Number.NEGATIVE_INFINITY
  const scale = Math.abs(theta * mean) < 1e-9 ? mean : shape / theta
  return -Math.log(scale) - shape - 1
}

/** Scans θ from its lower end −1/largest up, then narrows by golden section round the highest point. */
function bestTheta(y: ArrayLike<number>, mean: number, most: number): number {
  const grid: number[] = []
  for (let i = 1; i <= 60; i++) grid.push(-(1 - 10 ** (-i / 5)) / most)
  grid.reverse()
  grid.push(0)
  for (let i = -30; i <= 40; i++) grid.push(10 ** (i / 10) / mean)
  const heights = grid.map((theta) => profile(y, theta, mean))
  const top = heights.reduce((best, h, i) => (h > heights[best]! ? i : best), 0)
  if (heights[top] === Number.NEGATIVE_INFINITY || top === grid.length - 1) {
    throw new CoreError('no_convergence', 'generalisedPareto: the likelihood has no maximum inside the range of shapes')
  }
  let low = grid[Math.max(0, top - 1)]!
  let high = grid[top + 1]!
  const golden = (Math.sqrt(5) - 1) / 2
  let [a, b] = [high - golden * (high - low), low + golden * (high - low)]
  let [fa, fb] = [profile(y, a, mean), profile(y, b, mean)]
  for (let step = 0; step < 100; step++) {
    if (fa > fb) {
      ;[high, b, fb] = [b, a, fa]
      a = high - golden * (high - low)
      fa = profile(y, a, mean)
    } else {
      ;[low, a, fa] = [a, b, fb]
      b = low + golden * (high - low)
      fb = profile(y, b, mean)
    }
  }
  return (low + high) / 2
}

/** Standard errors from minus the second derivatives of the log likelihood, with z = y / scale and u = 1 + shape z. */
function errors(
  y: ArrayLike<number>,
  shape: number,
  scale: number,
): { shapeError: number | null; scaleError: number | null } {
  let [aa, ab, bb] = [0, 0, -y.length]
  for (let i = 0; i < y.length; i++) {
    const z = y[i]! / scale
    const u = 1 + shape * z
    // Near shape 0 the terms of the first line cancel; their limit is 2 z³/3 − z².
    aa +=
      Math.abs(shape) < 1e-4
        ? (2 * z ** 3) / 3 - z * z
        : (2 * Math.log(u)) / shape ** 3 - (2 * z) / (shape * shape * u) - (1 + 1 / shape) * (z / u) ** 2
    ab += ((1 + shape) * (z / u) ** 2 - z / u) / scale
    bb += (1 + shape) * (z / u + z / (u * u))
  }
  bb /= scale * scale
  try {
    const inverse = cholesky([
      [aa, ab],
      [ab, bb],
    ]).inverse()
    return { shapeError: Math.sqrt(inverse[0]![0]!), scaleError: Math.sqrt(inverse[1]![1]!) }
  } catch (error) {
    if (error instanceof CoreError && error.code === 'singular') return { shapeError: null, scaleError: null }
    throw error
  }
}
