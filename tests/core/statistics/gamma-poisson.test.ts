import { describe, expect, it } from 'vitest'
import {
  gammaPoisson,
  logEvidence,
  noEventProbability,
  predictiveCdf,
  predictivePmf,
  quietExposure,
  rateQuantile,
} from '../../../core/statistics/gamma-poisson.ts'
import { matchReference } from './reference.ts'

describe('gammaPoisson', () => {
  matchReference('gamma-poisson.json', ({ events, exposure, horizon, prior_shape, prior_rate, probabilities }) => {
    const belief = gammaPoisson(events, exposure, { shape: prior_shape, rate: prior_rate })
    return {
      posterior_shape: belief.shape,
      posterior_rate: belief.rate,
      posterior_quantiles: probabilities.map((p: number) => rateQuantile(belief, p)),
      p_no_event: noEventProbability(belief, horizon),
      predictive_pmf_0_to_5: [0, 1, 2, 3, 4, 5].map((k) => predictivePmf(belief, horizon, k)),
      predictive_cdf_5: predictiveCdf(belief, horizon, 5),
    }
  })

  it('finds the quiet spell whose probability is the one asked for', () => {
    const belief = gammaPoisson(4, 600)
    expect(noEventProbability(belief, quietExposure(belief, 0.05))).toBeCloseTo(0.05, 14)
  })

  it('has an evidence that multiplies when the exposure is split', () => {
    // p(first span) p(second span | first) must be p(both), whatever the split.
    const prior = { shape: 0.7, rate: 90 }
    const both = logEvidence(5, 300, prior)
    const first = logEvidence(2, 120, prior)
    const second = logEvidence(3, 180, gammaPoisson(2, 120, prior))
    expect(first + second).toBeCloseTo(both, 12)
  })

  it('refuses an improper belief for prediction', () => {
    expect(() => noEventProbability({ shape: 0.5, rate: 0 }, 1)).toThrow(
      expect.objectContaining({ code: 'out_of_range' }),
    )
  })
})
