import { type GammaBelief, quietExposure } from '../../statistics/gamma-poisson.ts'
import type { CauseSet } from '../likely-sets.ts'
import { casesOf, type Isolation, isolations, leavesNeutral, placedGuilt, type Site } from './isolations.ts'
import { type Case, SETTLED, type Trial, trial } from './trial.ts'

/** Days that are tried; beyond four weeks other ways are better. */
const DAYS = [1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 12, 14, 17, 21, 24, 28] as const
export const LONGEST_DAYS = 28
/** Less doubt than this about a thing is not worth a day without it. */
const LEAST_DOUBT = 0.02
/** At least this part of what an isolation may take away must have a known place. */
const PLACED = 0.6
/** An isolation that settles less likely than this is no advice. */
const LIKELY = 0.5
/** Two isolations that differ in less than this share of what may be the case ask the same. */
const SAME = 0.04
/** How many go on from the first look to the search for their length. */
const SHORT_LIST = 24
/** Each further circuit without supply is a burden; a load is the lesser one. Judgement, no source. */
const BURDEN = 0.25
const LOAD_BURDEN = 0.85

/** One isolation, how long it must last, and what it then tells. */
export interface Proposal {
  readonly isolation: Isolation
  readonly days: number
  readonly trial: Trial
  /** The same by the breakers alone; null where that makes no difference. */
  readonly byBreaker: Trial | null
  /** Probability that it has a part in the trips, before. */
  readonly prior: number
}

/**
 * The best isolations, at most `count`: those that settle their question with 90 % odds within four weeks first, by expected loss of
 * entropy of the line-up per day and burden. Nothing twice that asks the same.
 */
export function bestIsolations(
  site: Site,
  sets: readonly CauseSet[],
  trips: number,
  belief: GammaBelief,
  count: number,
): Proposal[] {
  const around = Math.min(24 * LONGEST_DAYS, Math.max(24, quietExposure(belief, 1 - SETTLED)))
  const looked = isolations(site, sets)
    .map((isolation) => {
      const cases = casesOf(site, isolation, sets, trips, true)
      const prior = guiltOf(cases)
      return { isolation, cases, prior, gain: trial(cases, belief, around).bits / burdenOf(isolation) }
    })
    .filter(({ isolation, prior }) => {
      const placed = placedGuilt(site, isolation, sets)
      return placed >= LEAST_DOUBT && placed >= PLACED * prior
    })
  looked.sort((a, b) => b.gain - a.gain || compare(a.isolation, b.isolation))
  const proposals = looked.slice(0, SHORT_LIST).map(({ isolation, cases, prior }) => {
    const days = daysFor(cases, belief)
    const byBreaker = leavesNeutral(site, isolation)
      ? trial(casesOf(site, isolation, sets, trips, false), belief, 24 * days)
      : null
    return { isolation, days, trial: trial(cases, belief, 24 * days), byBreaker, prior }
  })
  const worth = (p: Proposal): number => p.trial.bits / (p.days * burdenOf(p.isolation))
  proposals.sort(
    (a, b) =>
      Number(b.trial.settles >= SETTLED) - Number(a.trial.settles >= SETTLED) ||
      worth(b) - worth(a) ||
      compare(a.isolation, b.isolation),
  )
  const kept: Proposal[] = []
  for (const proposal of proposals) {
    const { settles } = proposal.trial
    // one that may settle nothing in four weeks is named only where nothing better is
    if (kept.length === count || settles < LIKELY || (kept.length > 0 && settles < SETTLED)) break
    if (kept.every((other) => differ(site, sets, proposal.isolation, other.isolation) >= SAME)) kept.push(proposal)
  }
  return kept
}

/** The fewest days that settle the question with 90 % odds; four weeks when none do. */
function daysFor(cases: readonly Case[], belief: GammaBelief): number {
  return DAYS.find((days) => trial(cases, belief, 24 * days).settles >= SETTLED) ?? LONGEST_DAYS
}

function guiltOf(cases: readonly Case[]): number {
  return cases.reduce((sum, c) => sum + (c.guilty ? c.weight : 0), 0)
}

function burdenOf({ circuits }: Isolation): number {
  return circuits.length === 0 ? LOAD_BURDEN : 1 + BURDEN * (circuits.length - 1)
}

/** Probability of what one of the two would take away and the other not. */
function differ(site: Site, sets: readonly CauseSet[], a: Isolation, b: Isolation): number {
  let sum = 0
  for (const set of sets) {
    const one = [set]
    sum += Math.abs(guiltOf(casesOf(site, a, one, 1, true)) - guiltOf(casesOf(site, b, one, 1, true)))
  }
  return sum
}

function compare(a: Isolation, b: Isolation): number {
  return a.of.length - b.of.length || (a.of.join() < b.of.join() ? -1 : 1)
}
