import { describe, expect, it } from 'vitest'
import { stratified } from '../../../../core/findings/preferring/stratified.ts'
import type { Stratifier } from '../../../../core/findings/preferring/stratum-exposure.ts'
import { referenceCases } from '../../statistics/reference.ts'

type Cells = readonly [events1: number, time1: number, events0: number, time0: number]

/** Published strata in place of hours of the day: one trip an event. */
function of(strata: readonly Cells[]) {
  const trips = strata.flatMap(([x1, , x0], stratum) => [
    ...Array.from({ length: x1 }, () => [{ stratum, share: 1, inside: 1 }]),
    ...Array.from({ length: x0 }, () => [{ stratum, share: 1, inside: 0 }]),
  ])
  const by: Stratifier = {
    strata: 'hour',
    times: () => ({
      known: Float64Array.from(strata, ([, t1, , t0]) => t1 + t0),
      exposed: Float64Array.from(strata, ([, t1]) => t1),
    }),
    places: () => trips,
  }
  const none = new Float64Array(0)
  return stratified(by, { inside: none, known: none }, [])!
}

describe('stratified against published strata', () => {
  it('finds the rate ratio of the British doctors', () => {
    const doctors = referenceCases('mantel-haenszel.json').find((c) =>
      c.name.startsWith('rate ratio: British doctors'),
    )!
    const found = of(doctors.input.strata)
    // Poisson regression on the same table (R's glm, in the reference): 0.3545356, standard error 0.1073741. The penalty moves
    // ln ψ by no more than about half over the 101 events of non-smokers.
    const glm = referenceCases('poisson-regression.json').find((c) => c.name === 'deaths of British doctors')!
    const [, log] = glm.expected.coefficients as number[]
    const [, error] = glm.expected.standard_errors as number[]
    expect(Math.abs(Math.log(found.ratio!) - log!)).toBeLessThan(0.005)
    // Mantel and Haenszel: 1.4247, another estimator of the same ratio
    expect(Math.abs(Math.log(found.ratio! / Number(doctors.expected.rate_ratio)))).toBeLessThan(0.02)
    // 90 % limits: 1.645 standard errors
    expect(Math.log(found.low)).toBeCloseTo(log! - 1.645 * error!, 2)
    expect(Math.log(found.high)).toBeCloseTo(log! + 1.645 * error!, 2)
    expect(found.p).toBeLessThan(0.001)
    expect(found.trips).toBe(731)
  })

  it('is the matched-pair ratio with half a pair added to each side', () => {
    // Retinopathy, treated against untreated eye: 16 and 63 discordant pairs, conditional odds ratio 16 / 63.
    const eyes = referenceCases('conditional-logit.json').find((c) => c.name.startsWith('retinopathy'))!
    const [ratio] = eyes.expected.odds_ratios as number[]
    expect(16 / 63).toBeCloseTo(ratio!, 9)
    const pairs = Array.from({ length: 79 }, (_, i): Cells => (i < 16 ? [1, 1, 0, 1] : [0, 1, 1, 1]))
    expect(of(pairs).ratio!).toBeCloseTo(16.5 / 63.5, 4)
  })
})
