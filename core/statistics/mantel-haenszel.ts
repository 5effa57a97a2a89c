import normalQuantile from '@stdlib/stats-base-dists-normal-quantile'
import { requireConfidence, requireCount, requireEventCount, requireRange } from './checks.ts'
import { chiSquaredUpperTail } from './chi-squared.ts'
import { type ConditionalOdds, conditionalOdds } from './conditional-odds.ts'
import { hypergeometricWeights, type Table } from './fisher-exact.ts'

export interface MantelHaenszel {
  /** Common odds ratio; Infinity when no b·c is positive, null when nothing tells. */
  readonly oddsRatio: number | null
  /** Standard error of its logarithm and limits (Robins, Breslow & Greenland); null where not defined. */
  readonly logStandardError: number | null
  readonly low: number | null
  readonly high: number | null
  /** Mantel–Haenszel test without and with continuity correction; null when no stratum varies. */
  readonly chi2: number | null
  readonly p: number | null
  readonly chi2Corrected: number | null
  readonly pCorrected: number | null
}

/**
 * Odds ratio common to several 2 × 2 tables [[a, b], [c, d]] (strata: say hours of the day), with its test.
 *
 * @throws {CoreError} too_few_values (no stratum), out_of_range
 * @see Mantel & Haenszel (1959), J. Natl. Cancer Inst. 22, 719-748
 * @see Robins, Breslow & Greenland (1986), Biometrics 42, 311-323
 */
export function mantelHaenszel(
  strata: readonly Table[],
  options: { readonly confidence?: number } = {},
): MantelHaenszel {
  const confidence = options.confidence ?? 0.95
  requireStrata('mantelHaenszel', strata, confidence)
  let [r, s, pr, psqr, qs, excess, variance] = [0, 0, 0, 0, 0, 0, 0]
  for (const [[a, b], [c, d]] of strata) {
    const n = a + b + c + d
    if (n < 2) continue
    const [ri, si] = [(a * d) / n, (b * c) / n]
    const [pi, qi] = [(a + d) / n, (b + c) / n]
    r += ri
    s += si
    pr += pi * ri
    psqr += pi * si + qi * ri
    qs += qi * si
    excess += a - ((a + b) * (a + c)) / n
    variance += ((a + b) * (c + d) * (a + c) * (b + d)) / (n * n * (n - 1))
  }
  const oddsRatio = r === 0 && s === 0 ? null : r / s
  const tests =
    variance > 0 ? testsOf(excess, variance) : { chi2: null, p: null, chi2Corrected: null, pCorrected: null }
  if (oddsRatio === null || r === 0 || s === 0)
    return { oddsRatio, logStandardError: null, low: null, high: null, ...tests }
  const logStandardError = Math.sqrt(pr / (2 * r * r) + psqr / (2 * r * s) + qs / (2 * s * s))
  return { oddsRatio, logStandardError, ...limits(oddsRatio, logStandardError, confidence), ...tests }
}

/** Exact inference on the common odds ratio, given all margins of all strata (Gart 1970). Cost grows with the square of the counts. */
export function mantelHaenszelExact(
  strata: readonly Table[],
  options: { readonly confidence?: number } = {},
): ConditionalOdds {
  const confidence = options.confidence ?? 0.95
  requireStrata('mantelHaenszelExact', strata, confidence)
  let weights: Float64Array = Float64Array.of(0)
  let at = 0
  for (const table of strata) {
    const { least, logWeights } = hypergeometricWeights(table)
    weights = convolveLogs(weights, logWeights)
    at += table[0][0] - least
  }
  return conditionalOdds(weights, at, confidence)
}

export interface Homogeneity {
  /** Breslow–Day statistic and Tarone's corrected one, chi-squared with df degrees of freedom if the odds ratio is common. */
  readonly breslowDay: number
  readonly tarone: number
  readonly degreesOfFreedom: number
  readonly p: number
  readonly pTarone: number
}

/**
 * Do the strata share one odds ratio? Null when fewer than two strata tell or the common odds ratio is 0 or infinite.
 *
 * @see Breslow & Day (1980), Statistical Methods in Cancer Research I; Tarone (1985), Biometrika 72, 91-95
 */
export function breslowDay(strata: readonly Table[]): Homogeneity | null {
  const psi = mantelHaenszel(strata).oddsRatio
  if (psi === null || psi === 0 || psi === Number.POSITIVE_INFINITY) return null
  let [statistic, distance, variance, informative] = [0, 0, 0, 0]
  for (const [[a, b], [c, d]] of strata) {
    if (a + b === 0 || c + d === 0 || a + c === 0 || b + d === 0) continue
    const expected = expectedCount(a + b, c + d, a + c, psi)
    const v = 1 / (1 / expected + 1 / (a + b - expected) + 1 / (a + c - expected) + 1 / (c + d - a - c + expected))
    statistic += (a - expected) ** 2 / v
    distance += a - expected
    variance += v
    informative++
  }
  if (informative < 2) return null
  const df = informative - 1
  const tarone = statistic - (distance * distance) / variance
  return {
    breslowDay: statistic,
    tarone,
    degreesOfFreedom: df,
    p: chiSquaredUpperTail(statistic, df),
    pTarone: chiSquaredUpperTail(Math.max(0, tarone), df),
  }
}

/** One stratum of counts over time: [events exposed, time exposed, events unexposed, time unexposed]. */
export type RateStratum = readonly [events1: number, time1: number, events0: number, time0: number]

export interface MantelHaenszelRates {
  readonly rateRatio: number | null
  readonly logStandardError: number | null
  readonly low: number | null
  readonly high: number | null
  readonly chi2: number | null
  readonly p: number | null
}

/**
 * Rate ratio common to several strata of events over time. Strata without time on one side tell nothing and drop out.
 *
 * @throws {CoreError} too_few_values (no stratum), out_of_range
 * @see Greenland & Robins (1985), Biometrics 41, 55-68; Rothman, Greenland & Lash (2008), chapter 15
 */
export function mantelHaenszelRates(
  strata: readonly RateStratum[],
  options: { readonly confidence?: number } = {},
): MantelHaenszelRates {
  const confidence = options.confidence ?? 0.95
  requireCount('mantelHaenszelRates', strata.length, 1)
  requireConfidence('mantelHaenszelRates', confidence)
  let [up, down, excess, variance] = [0, 0, 0, 0]
  for (const [x1, t1, x0, t0] of strata) {
    requireEventCount('mantelHaenszelRates', x1)
    requireEventCount('mantelHaenszelRates', x0)
    for (const t of [t1, t0])
      requireRange('mantelHaenszelRates', t >= 0 && t < Number.POSITIVE_INFINITY, 'finite times from 0', t)
    const t = t1 + t0
    if (t1 === 0 || t0 === 0) continue
    up += (x1 * t0) / t
    down += (x0 * t1) / t
    excess += x1 - ((x1 + x0) * t1) / t
    variance += ((x1 + x0) * t1 * t0) / (t * t)
  }
  const chi2 = variance > 0 ? excess ** 2 / variance : null
  const test = { chi2, p: chi2 === null ? null : chiSquaredUpperTail(chi2, 1) }
  const rateRatio = up === 0 && down === 0 ? null : up / down
  if (rateRatio === null || up === 0 || down === 0)
    return { rateRatio, logStandardError: null, low: null, high: null, ...test }
  const logStandardError = Math.sqrt(variance / (up * down))
  return { rateRatio, logStandardError, ...limits(rateRatio, logStandardError, confidence), ...test }
}

function requireStrata(name: string, strata: readonly Table[], confidence: number): void {
  requireCount(name, strata.length, 1)
  requireConfidence(name, confidence)
  for (const table of strata) for (const count of table.flat()) requireEventCount(name, count)
}

function limits(ratio: number, logError: number, confidence: number): { low: number; high: number } {
  const reach = normalQuantile((1 + confidence) / 2, 0, 1) * logError
  return { low: ratio * Math.exp(-reach), high: ratio * Math.exp(reach) }
}

function testsOf(
  excess: number,
  variance: number,
): { chi2: number; p: number; chi2Corrected: number; pCorrected: number } {
  const chi2 = excess ** 2 / variance
  const correction = Math.abs(excess) >= 0.5 ? 0.5 : 0
  const chi2Corrected = (Math.abs(excess) - correction) ** 2 / variance
  return { chi2, p: chiSquaredUpperTail(chi2, 1), chi2Corrected, pCorrected: chiSquaredUpperTail(chi2Corrected, 1) }
}

/** The upper left count that has odds ratio psi for these margins: a root of a quadratic, in its stable form. */
function expectedCount(row1: number, row2: number, column1: number, psi: number): number {
  const q = psi - 1
  const linear = row2 - column1 + psi * (row1 + column1)
  const root = Math.sqrt(Math.max(0, linear * linear - 4 * q * psi * row1 * column1))
  return (2 * psi * row1 * column1) / (linear + root)
}

/** Logs of the convolution of two lists of terms given as logs. */
function convolveLogs(a: Float64Array, b: Float64Array): Float64Array {
  const topA = a.reduce((x, y) => Math.max(x, y), Number.NEGATIVE_INFINITY)
  const topB = b.reduce((x, y) => Math.max(x, y), Number.NEGATIVE_INFINITY)
  const sums = new Float64Array(a.length + b.length - 1)
  for (let i = 0; i < a.length; i++) {
    const ai = Math.exp(a[i]! - topA)
    for (let j = 0; j < b.length; j++) sums[i + j]! += ai * Math.exp(b[j]! - topB)
  }
  return sums.map((v) => Math.log(v) + topA + topB)
}
