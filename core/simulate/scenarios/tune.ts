import { type Plan, simulate } from '../simulate.ts'
import type { Simulated } from '../simulated.ts'

/** Coarse steps while the strength is sought. */
const COARSE_MS = 30_000

/**
 * Finds a strength of the fault at which the device trips between `least` and `most` times, and simulates with it: begins at
 * 1 and halves between too weak and too strong, so that a scenario is neither silent nor dark all day. Where no strength within 14 tries
 * does, the nearest one is taken.
 */
export function tuned(planAt: (strength: number) => Plan, least: number, most: number, scale = 1): Simulated {
  const tripsAt = (strength: number): number =>
    simulate({ ...planAt(strength), logger: null, stepMs: COARSE_MS }).trips.length
  let weak = 0
  let strong = Number.POSITIVE_INFINITY
  let strength = scale
  let best = { strength, miss: Number.POSITIVE_INFINITY }
  for (let attempt = 0; attempt < 14; attempt++) {
    const count = tripsAt(strength)
    const miss = count < least ? least - count : Math.max(0, count - most)
    if (miss < best.miss) best = { strength, miss }
    if (miss === 0) break
    if (count < least) weak = strength
    else strong = strength
    strength = strong === Number.POSITIVE_INFINITY ? weak * 1.3 : weak === 0 ? strong / 1.3 : Math.sqrt(weak * strong)
  }
  return simulate(planAt(best.strength))
}
