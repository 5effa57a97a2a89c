import betaQuantile from '@stdlib/stats-base-dists-beta-quantile'
import { binomialCdf, binomialPmf, binomialUpperTail } from './binomial.ts'
import { requireConfidence, requireEventCount, requireRange } from './checks.ts'
import { type ExactPValues, exactPValues } from './exact-test.ts'
import { exactTwoSided } from './exact-two-sided.ts'

export interface Proportion {
  /** Share of trials with the event; null without trials. */
  readonly proportion: number | null
  readonly low: number
  readonly high: number
}

/**
 * A proportion with its exact central interval. No trial is no information: the interval is then 0 to 1.
 *
 * @throws {CoreError} out_of_range
 * @see Clopper & Pearson (1934), Biometrika 26, 404-413
 */
export function clopperPearson(
  events: number,
  trials: number,
  options: { readonly confidence?: number } = {},
): Proportion {
  const confidence = options.confidence ?? 0.95
  requireTrials('clopperPearson', events, trials)
  requireConfidence('clopperPearson', confidence)
  const side = (1 - confidence) / 2
  return {
    proportion: trials === 0 ? null : events / trials,
    low: events === 0 ? 0 : betaQuantile(side, events, trials - events + 1),
    high: events === trials ? 1 : betaQuantile(1 - side, events + 1, trials - events),
  }
}

/** Exact binomial test: are `events` of `trials` in line with the proportion `p0`? */
export function binomialTest(events: number, trials: number, p0: number): ExactPValues {
  requireTrials('binomialTest', events, trials)
  requireRange('binomialTest', p0 >= 0 && p0 <= 1, 'a proportion from 0 to 1', p0)
  const q0 = 1 - p0
  const pmf = (k: number): number => binomialPmf(k, trials, p0, q0)
  const lower = (k: number): number => binomialCdf(k, trials, p0, q0)
  const upper = (k: number): number => binomialUpperTail(k, trials, p0, q0)
  const two = exactTwoSided(events, { pmf, lower, upper, mode: Math.floor((trials + 1) * p0), least: 0, most: trials })
  return exactPValues(lower(events), upper(events), two, pmf(events))
}

function requireTrials(name: string, events: number, trials: number): void {
  requireEventCount(name, events)
  requireRange(
    name,
    Number.isSafeInteger(trials) && trials >= events,
    'whole trials, at least as many as events',
    trials,
  )
}
