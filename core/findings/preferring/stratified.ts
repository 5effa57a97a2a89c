import { gammaQuantile } from '../../statistics/gamma-quantile.ts'
import { poissonBinomialUpperTail } from '../../statistics/poisson-binomial.ts'
import type { Spans } from '../../timeline/spans.ts'
import type { Strata, Stratifier, TripPlace } from './stratum-exposure.ts'

/** Rate inside against outside, like compared with like. */
export interface Stratified {
  readonly strata: Strata
  /** Trips that tell: their stratum has exposed and unexposed time. */
  readonly telling: number
  /** Of all trips whose time is known: those inside (shares for intervals), and those expected at these strata. */
  readonly trips: number
  readonly inside: number
  readonly expected: number
  /** Penalised estimate of the ratio of rates with 90 % profile limits; null when no trip tells. */
  readonly ratio: number | null
  readonly low: number
  readonly high: number
  /** One-sided exact p, given the strata of the trips. */
  readonly p: number
}

/** Ratios beyond e^12 are infinite to any purpose. */
const FAR = 12
/** ln of a ratio, to five digits. */
const CLOSE = 2e-6
const CONFIDENCE = 0.9
const GOLDEN = (Math.sqrt(5) - 1) / 2

interface Placed {
  readonly share: number
  readonly inside: number
  /** Exposed share of the stratum's known time. */
  readonly exposed: number
}

/**
 * Do trips prefer the time inside to that outside at the same hours? Given the stratum of each trip, it falls inside with a chance
 * ψ e / (ψ e + 1 − e), e the exposed share of the stratum's time: the likelihood of a time-stratified case-crossover in which all energised
 * time of the stratum is referent, and of Mantel and Haenszel's strata of rates. ψ by Firth's penalised likelihood, finite when a
 * cell is empty; p by the exact sum of such chances at ψ = 1. A trip known as an interval spreads over the strata of its interval, and its
 * share inside counts as the whole number below, so that spreading never makes the test bolder. Null when no time is known of any trip.
 *
 * @see Mantel & Haenszel (1959), J. Natl. Cancer Inst. 22, 719-748; Maclure (1991), Am. J. Epidemiol. 133, 144-153
 * @see Firth (1993), Biometrika 80, 27-38; Heinze & Puhr (2010), Statistics in Medicine 29, 770-777 (conditional logistic)
 */
export function stratified(
  by: Stratifier,
  when: { readonly inside: Spans; readonly known: Spans },
  trips: readonly { readonly from: number; readonly to: number }[],
): Stratified | null {
  const times = by.times(when.inside, when.known)
  const exposedShare = (place: TripPlace): number =>
    Math.min(1, times.exposed[place.stratum]! / times.known[place.stratum]!)
  const placed = by
    .places(when.inside, when.known, trips)
    .filter((places): places is readonly TripPlace[] => places !== null)
    .map((places) => places.map((p): Placed => ({ share: p.share, inside: p.inside, exposed: exposedShare(p) })))
  if (placed.length === 0) return null
  const sum = (value: (place: Placed) => number) => (places: readonly Placed[]) =>
    places.reduce((total, place) => total + place.share * value(place), 0)
  const chances = placed.map(sum((p) => p.exposed))
  const inside = placed.map(sum((p) => p.inside)).reduce((total, x) => total + x, 0)
  const tells = placed.filter((places) => places.some((p) => p.exposed > 0 && p.exposed < 1))
  return {
    strata: by.strata,
    telling: tells.length,
    trips: placed.length,
    inside,
    expected: chances.reduce((total, x) => total + x, 0),
    ...(tells.length === 0 ? { ratio: null, low: 0, high: Number.POSITIVE_INFINITY } : estimate(tells)),
    p: poissonBinomialUpperTail(
      Math.floor(inside + 1e-9),
      chances.map((c) => Math.min(1, c)),
    ),
  }
}

/** Maximum of the penalised likelihood in ln ψ by golden section, and where it has fallen by half a χ² quantile on both sides. */
function estimate(trips: readonly (readonly Placed[])[]): { ratio: number; low: number; high: number } {
  const at = (b: number): number => penalised(trips, b)
  let low = -FAR
  let high = FAR
  let a = high - GOLDEN * (high - low)
  let c = low + GOLDEN * (high - low)
  let [fa, fc] = [at(a), at(c)]
  while (high - low > CLOSE) {
    if (fa >= fc) {
      high = c
      c = a
      fc = fa
      a = high - GOLDEN * (high - low)
      fa = at(a)
    } else {
      low = a
      a = c
      fa = fc
      c = low + GOLDEN * (high - low)
      fc = at(c)
    }
  }
  const best = (low + high) / 2
  const floor = at(best) - gammaQuantile(CONFIDENCE, 0.5, 0.5) / 2
  return {
    ratio: Math.exp(best),
    low: at(-FAR) > floor ? 0 : Math.exp(crossing(at, floor, -FAR, best)),
    high: at(FAR) > floor ? Number.POSITIVE_INFINITY : Math.exp(crossing(at, floor, FAR, best)),
  }
}

function crossing(at: (b: number) => number, floor: number, outside: number, inside: number): number {
  let [far, near] = [outside, inside]
  while (Math.abs(far - near) > CLOSE) {
    const middle = (far + near) / 2
    if (at(middle) > floor) near = middle
    else far = middle
  }
  return (far + near) / 2
}

function penalised(trips: readonly (readonly Placed[])[], b: number): number {
  const ratio = Math.exp(b)
  let value = 0
  let information = 0
  for (const places of trips) {
    let chance = 0
    for (const { share, inside, exposed } of places) {
      const all = ratio * exposed + 1 - exposed
      chance += (share * (ratio * inside + 1 - inside)) / all
      information += (share * ratio * exposed * (1 - exposed)) / (all * all)
    }
    value += Math.log(chance)
  }
  return value + 0.5 * Math.log(Math.max(information, 1e-300))
}
