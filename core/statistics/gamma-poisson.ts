import betaCdf from '@stdlib/stats-base-dists-beta-cdf'
import { requireEventCount, requireRange } from './checks.ts'
import { gammaQuantile } from './gamma-quantile.ts'
import { logGamma } from './log-gamma.ts'

/** A gamma distribution of a rate: shape without unit, rate in units of exposure (say hours). Mean = shape / rate. */
export interface GammaBelief {
  readonly shape: number
  readonly rate: number
}

/** Jeffreys' prior for a Poisson rate; improper, but any exposure makes the posterior proper. */
export const JEFFREYS: GammaBelief = { shape: 0.5, rate: 0 }

/**
 * What is believed of a Poisson rate after `events` in `exposure`: Gamma(shape + events, rate + exposure).
 *
 * @throws {CoreError} out_of_range
 * @see Gelman et al. (2013), Bayesian Data Analysis, 3rd ed., section 2.6
 */
export function gammaPoisson(events: number, exposure: number, prior: GammaBelief = JEFFREYS): GammaBelief {
  requireEventCount('gammaPoisson', events)
  requireRange(
    'gammaPoisson',
    exposure >= 0 && exposure < Number.POSITIVE_INFINITY,
    'a finite exposure from 0',
    exposure,
  )
  requireRange(
    'gammaPoisson',
    prior.shape > 0 && prior.rate >= 0,
    'a prior with shape above 0 and rate from 0',
    `${prior.shape}, ${prior.rate}`,
  )
  return { shape: prior.shape + events, rate: prior.rate + exposure }
}

/** The rate below which a share p of the belief lies, per unit of exposure. */
export function rateQuantile(belief: GammaBelief, p: number): number {
  return gammaQuantile(p, belief.shape, belief.rate)
}

/** Probability of no event in a further exposure `ahead`: (rate / (rate + ahead))^shape. */
export function noEventProbability(belief: GammaBelief, ahead: number): number {
  requireProper('noEventProbability', belief, ahead)
  return Math.exp(-belief.shape * Math.log1p(ahead / belief.rate))
}

/** The further exposure after which the probability of no event has fallen to p: how long a quiet spell must be. */
export function quietExposure(belief: GammaBelief, p: number): number {
  requireProper('quietExposure', belief, 0)
  requireRange('quietExposure', p > 0 && p <= 1, 'a probability above 0', p)
  return belief.rate * Math.expm1(-Math.log(p) / belief.shape)
}

/** Probability of exactly k events in a further exposure `ahead` (negative binomial). */
export function predictivePmf(belief: GammaBelief, ahead: number, k: number): number {
  requireProper('predictivePmf', belief, ahead)
  requireEventCount('predictivePmf', k)
  if (ahead === 0) return k === 0 ? 1 : 0
  const logCount = logGamma(belief.shape + k) - logGamma(belief.shape) - logGamma(k + 1)
  return Math.exp(logCount - belief.shape * Math.log1p(ahead / belief.rate) - k * Math.log1p(belief.rate / ahead))
}

/** Probability of at most k events in a further exposure `ahead` (negative binomial; Abramowitz & Stegun 26.5.26). */
export function predictiveCdf(belief: GammaBelief, ahead: number, k: number): number {
  requireProper('predictiveCdf', belief, ahead)
  requireEventCount('predictiveCdf', k)
  return ahead === 0 ? 1 : betaCdf(belief.rate / (belief.rate + ahead), belief.shape, k + 1)
}

/**
 * Log of the marginal likelihood of `events` at their instants during `exposure` under a proper prior:
 * ∫ λ^events e^(−λ exposure) dG(λ). Sums of such terms compare explanations with each other.
 */
export function logEvidence(events: number, exposure: number, prior: GammaBelief): number {
  const after = gammaPoisson(events, exposure, prior)
  requireProper('logEvidence', prior, exposure)
  return (
    logGamma(after.shape) -
    logGamma(prior.shape) -
    prior.shape * Math.log1p(exposure / prior.rate) -
    events * Math.log(after.rate)
  )
}

function requireProper(name: string, belief: GammaBelief, exposure: number): void {
  requireRange(
    name,
    belief.shape > 0 && belief.rate > 0,
    'a proper gamma belief',
    `shape ${belief.shape}, rate ${belief.rate}`,
  )
  requireRange(name, exposure >= 0 && exposure < Number.POSITIVE_INFINITY, 'a finite exposure from 0', exposure)
}
