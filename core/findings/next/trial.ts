import type { GammaBelief } from '../../statistics/gamma-poisson.ts'

/** Probability from which on a question counts as settled, one way or the other. */
export const SETTLED = 0.9
/** A trial with more trips than this is cut off: the rest is as good as certain. */
const MOST_TRIPS = 60

const DAY_H = 24

/** One way things may be, as an isolation sees it. */
export interface Case {
  readonly weight: number
  /** Whether what is isolated has a part in the trips. */
  readonly guilty: boolean
  /** Share of the trips that would go on all the same. */
  readonly left: number
}

/** What a spell of isolation is expected to tell. */
export interface Trial {
  /** Chance that the question is settled by its end. */
  readonly settles: number
  /** Expected loss of entropy over the cases, bits. */
  readonly bits: number
  /** Probability of guilt after a quiet spell, and as soon as a trip comes on the first day. */
  readonly ifQuiet: number
  readonly ifTrip: number
  /** Chance of a quiet spell when what is isolated is innocent. */
  readonly quietByChance: number
}

/**
 * What `hours` under supply with something isolated would tell. The number of trips in it is negative binomial: the rate is a gamma
 * belief, of which each case leaves a share. The question "has it a part in the trips?" is settled when its probability is at least
 * 0.9 or at most 0.1 afterwards; one that stands beyond these already is settled when the remaining doubt is a tenth of what it was. When trips
 * come within the spell would tell a little more and is left out: the odds are on the safe side. Weights of the cases sum to 1. Cost: cases × trips to be expected.
 *
 * @see Lindley (1956), Ann. Math. Statist. 27, 986-1005 (information of an experiment)
 */
export function trial(cases: readonly Case[], belief: GammaBelief, hours: number): Trial {
  const prior = cases.reduce((sum, c) => sum + (c.guilty ? c.weight : 0), 0)
  const yes = prior < SETTLED ? SETTLED : 1 - (1 - prior) * (1 - SETTLED)
  const no = prior > 1 - SETTLED ? 1 - SETTLED : prior * (1 - SETTLED)
  const mean = (belief.shape / belief.rate) * hours
  const most = Math.min(MOST_TRIPS, Math.ceil(mean + 8 * Math.sqrt(mean * (1 + hours / belief.rate)) + 8))
  // negative binomial by recursion: P(k + 1) = P(k) (shape + k) / (k + 1) · q
  const logs = cases.map(({ left }) => (left * hours) / (belief.rate + left * hours))
  const chance = cases.map(({ left }) => Math.exp(-belief.shape * Math.log1p((left * hours) / belief.rate)))
  let settles = 0
  let bits = 0
  let seen = 0
  let ifQuiet = prior
  for (let k = 0; k <= most; k++) {
    let all = 0
    let guilty = 0
    cases.forEach((c, i) => {
      const p = c.weight * chance[i]!
      all += p
      if (c.guilty) guilty += p
    })
    if (all > 0) {
      const after = guilty / all
      if (after >= yes || after <= no) settles += all
      if (k === 0) ifQuiet = after
      cases.forEach((c, i) => {
        const p = c.weight * chance[i]!
        if (p > 0) bits += p * Math.log2(chance[i]! / all)
      })
      seen += all
    }
    if (seen > 1 - 1e-9) break
    for (let i = 0; i < chance.length; i++) chance[i] = (chance[i]! * (belief.shape + k) * logs[i]!) / (k + 1)
  }
  return {
    settles: Math.min(1, settles),
    bits: Math.max(0, bits),
    ifQuiet,
    ifTrip: afterTrip(cases, belief, Math.min(DAY_H, hours)),
    quietByChance: Math.exp(-belief.shape * Math.log1p(hours / belief.rate)),
  }
}

/** Probability of guilt once at least one trip has come within so many hours. */
function afterTrip(cases: readonly Case[], belief: GammaBelief, hours: number): number {
  let all = 0
  let guilty = 0
  for (const c of cases) {
    const p = -c.weight * Math.expm1(-belief.shape * Math.log1p((c.left * hours) / belief.rate))
    all += p
    if (c.guilty) guilty += p
  }
  return all > 0 ? guilty / all : 0
}
