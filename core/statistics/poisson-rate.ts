import { requireConfidence, requireEventCount, requireRange } from './checks.ts'
import { type ExactPValues, exactPValues } from './exact-test.ts'
import { exactTwoSided } from './exact-two-sided.ts'
import { gammaQuantile } from './gamma-quantile.ts'
import { poissonCdf, poissonUpperTail } from './poisson-cdf.ts'
import { poissonPmf } from './poisson-pmf.ts'

export interface PoissonRate {
  /** Events per unit of exposure; null when there was no exposure. */
  readonly rate: number | null
  /** Two-sided central limits; `high` is Infinity without exposure. */
  readonly low: number
  readonly high: number
}

/**
 * A Poisson rate with Garwood's exact central interval. `exposure` in any unit (say energised hours); rate and limits
 * are per that unit. No exposure is no information: the interval is then the whole half line.
 *
 * @throws {CoreError} out_of_range (events not whole or negative, events without exposure, confidence outside (0, 1))
 * @see Garwood (1936), Biometrika 28, 437-442
 */
export function poissonRate(
  events: number,
  exposure: number,
  options: { readonly confidence?: number } = {},
): PoissonRate {
  const confidence = options.confidence ?? 0.95
  requireEventCount('poissonRate', events)
  requireRange(
    'poissonRate',
    exposure >= 0 && exposure < Number.POSITIVE_INFINITY,
    'a finite exposure from 0',
    exposure,
  )
  requireConfidence('poissonRate', confidence)
  if (exposure === 0) {
    requireRange('poissonRate', events === 0, 'exposure for its events', exposure)
    return { rate: null, low: 0, high: Number.POSITIVE_INFINITY }
  }
  const side = (1 - confidence) / 2
  return {
    rate: events / exposure,
    low: events === 0 ? 0 : gammaQuantile(side, events, exposure),
    high: gammaQuantile(side, events + 1, exposure, 'upper'),
  }
}

/**
 * Exact test of one Poisson rate: are `events` in `exposure` in line with `rate0` per unit of exposure?
 *
 * @throws {CoreError} out_of_range
 * @see Garwood (1936), Biometrika 28, 437-442
 */
export function poissonRateTest(events: number, exposure: number, rate0: number): ExactPValues {
  requireEventCount('poissonRateTest', events)
  requireRange(
    'poissonRateTest',
    exposure >= 0 && exposure < Number.POSITIVE_INFINITY,
    'a finite exposure from 0',
    exposure,
  )
  requireRange('poissonRateTest', rate0 >= 0 && rate0 < Number.POSITIVE_INFINITY, 'a finite rate from 0', rate0)
  const mean = exposure * rate0
  const two = exactTwoSided(events, {
    pmf: (k) => poissonPmf(k, mean),
    lower: (k) => poissonCdf(k, mean),
    upper: (k) => poissonUpperTail(k, mean),
    mode: Math.floor(mean),
    least: 0,
    most: Number.POSITIVE_INFINITY,
  })
  return exactPValues(poissonCdf(events, mean), poissonUpperTail(events, mean), two, poissonPmf(events, mean))
}
