import { CoreError } from '../errors.ts'
import { requireCount, requireFinite, requireRange, requireSameLength } from './checks.ts'
import { logGamma } from './log-gamma.ts'

export interface LombScargle {
  /** Share of the sum of squares about the mean that a sine of each frequency explains: 0 to 1. */
  readonly power: Float64Array
  /** Position of the largest power. */
  readonly peak: number
}

/**
 * Lomb–Scargle periodogram of values at uneven times, standard normalisation. With `floatingMean` a constant is fitted with each
 * sine (generalised periodogram), which is right when the times do not cover the phases evenly. Frequencies in cycles per
 * unit of t. Cost O(n · frequencies).
 *
 * @throws {CoreError} too_few_values (below 4), unequal_lengths, not_finite, out_of_range, zero_spread (all values equal)
 * @see Lomb (1976), Astrophys. Space Sci. 39, 447-462; Scargle (1982), Astrophys. J. 263, 835-853
 * @see Zechmeister & Kürster (2009), Astron. Astrophys. 496, 577-584 (floating mean)
 */
export function lombScargle(
  t: ArrayLike<number>,
  y: ArrayLike<number>,
  frequencies: ArrayLike<number>,
  options: { readonly floatingMean?: boolean } = {},
): LombScargle {
  requireSameLength('lombScargle', t, y)
  requireCount('lombScargle', t.length, 4)
  requireCount('lombScargle', frequencies.length, 1)
  for (const column of [t, y, frequencies]) requireFinite('lombScargle', column)
  const n = t.length
  let mean = 0
  for (let i = 0; i < n; i++) mean += y[i]! / n
  const d = Float64Array.from(y, (v) => v - mean)
  const total = d.reduce((sum, v) => sum + v * v, 0)
  if (Math.sqrt(total / n) <= 1e-14 * Math.abs(mean) || total === 0) {
    throw new CoreError('zero_spread', `lombScargle got ${n} equal values`)
  }
  const origin = t[0]!
  const power = new Float64Array(frequencies.length)
  let peak = 0
  for (let f = 0; f < frequencies.length; f++) {
    requireRange('lombScargle', frequencies[f]! > 0, 'frequencies above 0', frequencies[f])
    let [c, s, cc, cs, ss, dc, ds] = [0, 0, 0, 0, 0, 0, 0]
    for (let i = 0; i < n; i++) {
      const angle = 2 * Math.PI * frequencies[f]! * (t[i]! - origin)
      const [cos, sin] = [Math.cos(angle), Math.sin(angle)]
      c += cos
      s += sin
      cc += cos * cos
      cs += cos * sin
      ss += sin * sin
      dc += d[i]! * cos
      ds += d[i]! * sin
    }
    if (options.floatingMean) {
      cc -= (c * c) / n
      cs -= (c * s) / n
      ss -= (s * s) / n
    }
    // Reduction of the sum of squares by the best a cos + b sin: the two normal equations solved by Cramer's rule.
    const determinant = cc * ss - cs * cs
    const explained =
      determinant > 1e-12 * n * n
        ? (ss * dc * dc - 2 * cs * dc * ds + cc * ds * ds) / determinant
        : alongOneAxis(cc, cs, ss, dc, ds)
    power[f] = Math.min(1, Math.max(0, explained / total))
    if (power[f]! > power[peak]!) peak = f
  }
  return { power, peak }
}

/** When all phases lie on one line only one combination of cosine and sine is determined. */
function alongOneAxis(cc: number, cs: number, ss: number, dc: number, ds: number): number {
  const turn = Math.atan2(2 * cs, cc - ss) / 2
  const [cos, sin] = [Math.cos(turn), Math.sin(turn)]
  const square = cc * cos * cos + 2 * cs * cos * sin + ss * sin * sin
  return square > 0 ? (dc * cos + ds * sin) ** 2 / square : 0
}

/**
 * Baluev's bound on the probability that noise alone reaches `power` at some frequency up to `highest`, for the
 * floating-mean periodogram of values at the times t.
 *
 * @see Baluev (2008), Mon. Not. R. Astron. Soc. 385, 1279-1285
 */
export function lombScargleFalseAlarm(power: number, t: ArrayLike<number>, highest: number): number {
  const n = t.length
  requireCount('lombScargleFalseAlarm', n, 4)
  requireFinite('lombScargleFalseAlarm', t)
  requireRange('lombScargleFalseAlarm', power >= 0 && power <= 1, 'a power from 0 to 1', power)
  requireRange('lombScargleFalseAlarm', highest > 0, 'a frequency above 0', highest)
  let mean = 0
  for (let i = 0; i < n; i++) mean += t[i]! / n
  let variance = 0
  for (let i = 0; i < n; i++) variance += (t[i]! - mean) ** 2 / n
  const [h, k] = [n - 1, n - 3]
  const single = (1 - power) ** (k / 2)
  const gamma = Math.sqrt(2 / h) * Math.exp(logGamma(h / 2) - logGamma((h - 1) / 2))
  const crossings =
    gamma * highest * Math.sqrt(4 * Math.PI * variance) * (1 - power) ** ((k - 1) / 2) * Math.sqrt(0.5 * h * power)
  // 1 − (1 − single) e^−crossings without losing small values.
  return Math.min(1, -Math.expm1(-crossings) + single * Math.exp(-crossings))
}
