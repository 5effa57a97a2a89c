import type { Headroom } from '../contract/findings.ts'
import { CoreError } from '../errors.ts'
import { type GeneralisedPareto, generalisedPareto } from '../statistics/generalised-pareto.ts'
import type { Series } from '../timeline/series.ts'
import { totalMs } from '../timeline/spans.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { type HeldLevels, heldQuantile } from './standing.ts'
import { rounded } from './words.ts'

const MINUTE_MS = 60_000
const WEEK_MS = 7 * 24 * 60 * MINUTE_MS
/** Thresholds tried, as shares of the time below them; the highest that leaves spells enough is taken. */
const THRESHOLDS = [0.995, 0.99, 0.98, 0.95, 0.9] as const
/** Spells above the threshold with less than this between them are one: what lifted the level is the same. */
const APART_MS = 60 * MINUTE_MS
/** Fewer spells, or less logged time, do not carry a tail. */
const LEAST_SPELLS = 30
const LEAST_LOGGED_MS = 3 * 24 * 60 * MINUTE_MS
/** A trip current further above the threshold than so many times the greatest exceedance is nothing the log can speak of. */
const FARTHEST = 3
/** A reading this near before a trip is the trip's own rise: the spell ended there, but where it would have gone nobody knows. */
const BEFORE_TRIP_MS = 150_000
/** From this shape on the tail is heavier than any residual current: two kinds of spells are mixed, and nothing can be foretold. */
const HEAVIEST = 0.5
/** Half of the 90 % point of chi-squared with one degree of freedom: how far a profile may fall within its interval. */
const FALL = 2.7055 / 2
/** Shapes that a profile looks through, and the least chance of one spell that is told from none. */
const SHAPES = Array.from({ length: 73 }, (_, i) => -0.9 + i * 0.02)
const LEAST_CHANCE = 1e-9

/**
 * How often the level passes the trip current by itself, beyond what the log has seen: peaks of the spells above a high quantile, spells
 * an hour apart so that each counts once (runs declustering), with a generalised Pareto distribution fitted to what they exceed it by.
 * Spells that a trip cut short are left out of the fit. 90 % interval by the profile likelihood of the chance that one spell
 * passes, and by the count of spells. Null where the data are not enough. Linear in readings.
 *
 * @see Davison & Smith (1990), J. R. Statist. Soc. B 52, 393-442
 * @see Coles (2001), An Introduction to Statistical Modeling of Extreme Values, section 4.3.3
 */
export function levelTail(
  timeline: Timeline,
  levels: HeldLevels,
  tripMa: number,
): NonNullable<Headroom['tail']> | null {
  const { leakage, logged } = timeline
  const loggedMs = totalMs(logged)
  if (leakage === null || loggedMs < LEAST_LOGGED_MS) return null
  for (const share of THRESHOLDS) {
    const threshold = heldQuantile(levels, share)
    const peaks = spellPeaks(timeline, leakage, threshold)
    if (peaks.length < LEAST_SPELLS) continue
    const over = tripMa - threshold
    if (over <= 0) return null
    const exceeded = peaks.map((peak) => peak - threshold)
    if (over > FARTHEST * Math.max(...exceeded)) return null
    const fit = fitted(exceeded)
    if (fit === null || fit.shape >= HEAVIEST) return null
    const spellsPerWeek = (peaks.length * WEEK_MS) / loggedMs
    const chance = chanceOver(fit, over)
    const { low, high } = chanceInterval(exceeded, over, chance)
    // the count of spells is uncertain by a share of 1/√n; both together on the scale of logarithms
    const counted = 1.645 / Math.sqrt(peaks.length)
    const wider = (bound: number): number =>
      bound <= 0 || chance <= 0
        ? bound
        : chance * Math.exp(Math.sign(bound - chance) * Math.hypot(Math.log(bound / chance), counted))
    return {
      exceedMa: rounded(tripMa),
      perWeek: rounded(spellsPerWeek * chance),
      shape: rounded(fit.shape),
      low: rounded(spellsPerWeek * wider(low)),
      high: rounded(spellsPerWeek * Math.min(1, wider(high))),
      scale: rounded(fit.scale),
      thresholdMa: rounded(threshold),
      spells: peaks.length,
    }
  }
  return null
}

/** Greatest reading of each spell above the threshold while the device was closed; spells that end in a trip are left out. */
function spellPeaks({ trips, energised }: Timeline, { t, v }: Series, threshold: number): number[] {
  const peaks: number[] = []
  let peak = Number.NEGATIVE_INFINITY
  let last = Number.NEGATIVE_INFINITY
  let k = 0
  let e = 0
  const close = (): void => {
    if (peak === Number.NEGATIVE_INFINITY) return
    while (k < trips.length && trips[k]!.to < last) k++
    const cut = k < trips.length && trips[k]!.from - last <= BEFORE_TRIP_MS
    if (!cut) peaks.push(peak)
    peak = Number.NEGATIVE_INFINITY
  }
  for (let i = 0; i < t.length; i++) {
    if (!(v[i]! > threshold)) continue
    while (e < energised.length && energised[e + 1]! <= t[i]!) e += 2
    if (e >= energised.length) break
    if (t[i]! < energised[e]!) continue
    if (t[i]! - last > APART_MS) close()
    peak = Math.max(peak, v[i]!)
    last = t[i]!
  }
  close()
  return peaks
}

function fitted(exceeded: readonly number[]): GeneralisedPareto | null {
  try {
    return generalisedPareto(exceeded)
  } catch (error) {
    // Peaks all alike, or a likelihood without a maximum, are no tail.
    if (error instanceof CoreError && (error.code === 'zero_spread' || error.code === 'no_convergence')) return null
    throw error
  }
}

/** Chance that one exceedance passes `over`. */
function chanceOver({ shape, scale }: Pick<GeneralisedPareto, 'shape' | 'scale'>, over: number): number {
  if (Math.abs(shape) < 1e-9) return Math.exp(-over / scale)
  const base = 1 + (shape * over) / scale
  return base <= 0 ? 0 : base ** (-1 / shape)
}

/** The chances whose best likelihood, over all shapes, falls no more than `FALL` below the greatest. */
function chanceInterval(y: readonly number[], over: number, best: number): { low: number; high: number } {
  const top = profileAt(y, over, Math.max(LEAST_CHANCE, best))
  const holds = (logChance: number): boolean => profileAt(y, over, Math.exp(logChance)) >= top - FALL
  const middle = Math.log(Math.max(LEAST_CHANCE, best))
  const low = holds(Math.log(LEAST_CHANCE)) ? 0 : Math.exp(edge(holds, middle, Math.log(LEAST_CHANCE)))
  const high = Math.exp(holds(-1e-6) ? 0 : edge(holds, middle, -1e-6))
  return { low, high }
}

/** Where `holds` turns false between a place where it holds and one where it does not, by halving. */
function edge(holds: (x: number) => boolean, inside: number, outside: number): number {
  let [a, b] = [inside, outside]
  for (let step = 0; step < 30; step++) {
    const middle = (a + b) / 2
    if (holds(middle)) a = middle
    else b = middle
  }
  return a
}

/** Greatest log likelihood of the exceedances under a chance of passing `over`, over the shapes. */
function profileAt(y: readonly number[], over: number, chance: number): number {
  let best = Number.NEGATIVE_INFINITY
  for (const shape of SHAPES) {
    const isFlat = Math.abs(shape) < 1e-6
    const scale = isFlat ? -over / Math.log(chance) : (shape * over) / (chance ** -shape - 1)
    let sum = -y.length * Math.log(scale)
    for (const x of y) {
      const base = 1 + (shape * x) / scale
      if (base <= 0) {
        sum = Number.NEGATIVE_INFINITY
        break
      }
      sum -= isFlat ? x / scale : (1 + 1 / shape) * Math.log(base)
    }
    if (sum > best) best = sum
  }
  return best
}
