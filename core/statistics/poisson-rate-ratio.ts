import betaQuantile from '@stdlib/stats-base-dists-beta-quantile'
import { binomialCdf, binomialPmf, binomialUpperTail } from './binomial.ts'
import { requireConfidence, requireEventCount, requireRange } from './checks.ts'
import { type ExactPValues, exactPValues } from './exact-test.ts'
import { exactTwoSided } from './exact-two-sided.ts'

export interface PoissonRateRatio extends ExactPValues {
  /** First rate over second; Infinity when only the second saw no event, null when neither saw one. */
  readonly ratio: number | null
  /** Exact central limits of the ratio: 0 and Infinity where the data set none. */
  readonly low: number
  readonly high: number
}

/**
 * Exact comparison of two Poisson rates. Given the total, the first count is binomial with
 * p = r0 T1 / (r0 T1 + T2), r0 the ratio tested (1 unless told otherwise); Clopper–Pearson limits of p turn into limits
 * of the ratio. `events` and `exposures` are pairs [first, second]; exposures in one unit, both above 0.
 * `pGreater` is the one-sided p-value of "the first rate is higher than r0 times the second".
 *
 * @throws {CoreError} out_of_range
 * @see Przyborowski & Wilenski (1940), Biometrika 31, 313-323
 */
export function poissonRateRatio(
  events: readonly [number, number],
  exposures: readonly [number, number],
  options: { readonly confidence?: number; readonly ratio0?: number } = {},
): PoissonRateRatio {
  const { confidence = 0.95, ratio0 = 1 } = options
  const [x1, x2] = events
  const [t1, t2] = exposures
  requireEventCount('poissonRateRatio', x1)
  requireEventCount('poissonRateRatio', x2)
  for (const t of exposures)
    requireRange('poissonRateRatio', t > 0 && t < Number.POSITIVE_INFINITY, 'finite exposures above 0', t)
  requireConfidence('poissonRateRatio', confidence)
  requireRange('poissonRateRatio', ratio0 > 0 && ratio0 < Number.POSITIVE_INFINITY, 'a finite ratio above 0', ratio0)

  const n = x1 + x2
  const p = (ratio0 * t1) / (ratio0 * t1 + t2)
  const q = t2 / (ratio0 * t1 + t2)
  const pmf = (k: number): number => binomialPmf(k, n, p, q)
  const lower = (k: number): number => binomialCdf(k, n, p, q)
  const upper = (k: number): number => binomialUpperTail(k, n, p, q)
  const two = exactTwoSided(x1, { pmf, lower, upper, mode: Math.floor((n + 1) * p), least: 0, most: n })

  const side = (1 - confidence) / 2
  const scale = t2 / t1
  return {
    ratio: n === 0 ? null : x1 / t1 / (x2 / t2),
    low: x1 === 0 ? 0 : odds(betaQuantile(side, x1, x2 + 1)) * scale,
    // The limit's own odds are one over those of the mirrored quantile, which keeps its digits near p = 1.
    high: x2 === 0 ? Number.POSITIVE_INFINITY : scale / odds(betaQuantile(side, x2, x1 + 1)),
    ...exactPValues(lower(x1), upper(x1), two, pmf(x1)),
  }
}

function odds(p: number): number {
  return p / (1 - p)
}
