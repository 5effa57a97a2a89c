import { type GammaBelief, predictiveCdf, quietExposure } from '../../statistics/gamma-poisson.ts'

/** Longest stay that is worked out, h: ten years. */
const LONGEST_H = 87_600

/**
 * Hours under supply after which at least `trips` more trips have come with probability `odds`, by the gamma–Poisson
 * predictive distribution; Infinity beyond ten years.
 */
export function stayFor(belief: GammaBelief, trips: number, odds = 0.9): number {
  if (trips === 1) {
    const hours = quietExposure(belief, 1 - odds)
    return hours > LONGEST_H ? Number.POSITIVE_INFINITY : hours
  }
  const enough = (hours: number): boolean => predictiveCdf(belief, hours, trips - 1) <= 1 - odds
  if (!enough(LONGEST_H)) return Number.POSITIVE_INFINITY
  let [low, high] = [0, LONGEST_H]
  while (high - low > 1e-6 * high) {
    const middle = (low + high) / 2
    if (enough(middle)) high = middle
    else low = middle
  }
  return high
}
