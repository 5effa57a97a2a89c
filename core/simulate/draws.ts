import { type Random, seededRandom } from '../statistics/random.ts'

/** A stream of random numbers for one purpose. */
export interface Draws extends Random {
  /** Even over [low, high). */
  between(low: number, high: number): number
  chance(probability: number): boolean
  /** exp(normal): this median, this deviation of the logarithm. */
  logNormal(median: number, deviation: number): number
}

/**
 * The stream `name` of a seed. Each purpose (a load's runs, the logger's noise, …) takes a stream of its own, so that changing
 * one leaves the others as they were.
 */
export function draws(seed: number, name: string): Draws {
  const random = seededRandom(`${seed}/${name}`)
  return {
    ...random,
    between: (low, high) => low + (high - low) * random.uniform(),
    chance: (probability) => random.uniform() < probability,
    logNormal: (median, deviation) => median * Math.exp(random.normal(0, deviation)),
  }
}
