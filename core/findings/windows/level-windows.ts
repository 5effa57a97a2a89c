import { quantile } from '../../statistics/quantile.ts'
import { NO_SPANS, type Spans, subtract, totalMs, union } from '../../timeline/spans.ts'
import type { ExposureWindow } from '../line-up.ts'
import type { LogView } from '../log-view.ts'
import { OUTSIZED_MA } from '../run-profiles.ts'
import { heldAbove, thinned } from './held.ts'
import { withKicks } from './kicks.ts'
import { type Frame, type Layer, MINUTE_MS } from './trip-share.ts'

/** Shares of the time below the level above which headroom counts as used up. */
const CUTS = [0.5, 0.75, 0.9, 0.97, 0.99] as const
/** The level is that of some minutes before: the last rise to a trip must not speak for what stood there before. */
const LATE_MINUTES = [1, 5] as const
/** Trips come the oftener the higher the level: e times as often with every so large a share of the trip current. */
const STEEPNESS = [0.03, 0.1] as const

/** High time of which less than this is left when what belongs to single things is taken away is theirs altogether. */
const LEAST_LEFT = 0.5

/**
 * Hours in which the standing leakage was high, as it stood one or five minutes earlier, and high by many together: the
 * time that is somebody's (`others`) is left out. Priors sum to one at most.
 */
export function levelWindows(frame: Frame, log: LogView, others: Spans): ExposureWindow[] {
  const { minutes } = log
  if (minutes === null || minutes.t.length < 100) return []
  const sample = thinned(minutes.v, 20_000)
  const levels = CUTS.map((q) => quantile(sample, q))
  const windows: ExposureWindow[] = []
  const prior = 1 / (LATE_MINUTES.length * (CUTS.length + STEEPNESS.length))
  for (const late of LATE_MINUTES) {
    const held = levels.map((cut) => heldAbove(minutes, cut, true, late * MINUTE_MS))
    const known = subtract(held[0]!.known, others)
    const inside = held.map((h) => subtract(h.inside, others))
    const isTheirs = inside.map((spans, j) => totalMs(spans) < LEAST_LEFT * totalMs(held[j]!.inside))
    CUTS.forEach((q, j) => {
      if (isTheirs[j]) return
      const words = `while the standing leakage was above ${levels[j]!.toFixed(1)} mA`
      windows.push(...withKicks(frame, `above-${q}-${late}`, words, prior, [{ inside: inside[j]!, weight: 1 }], known))
    })
    // where the highest levels are nearly all somebody's, what is left of them is the edges of those excursions
    if (isTheirs.some((theirs) => theirs)) continue
    for (const steepness of STEEPNESS) {
      const weight = (mA: number): number => Math.exp((mA - levels.at(-1)!) / (steepness * log.tripMa))
      const layers = inside.map((spans, j): Layer => {
        const below = j === 0 ? 0 : weight(levels[j - 1]!)
        return { inside: spans, weight: weight(levels[j]!) - below }
      })
      const words = 'while the standing leakage was high, the more the higher'
      windows.push(...withKicks(frame, `higher-${steepness}-${late}`, words, prior, layers, known))
    }
  }
  return windows
}

/** Time in which one load, rain (`wet`, where the leakage rises with it) or something unlisted alone makes the level high. */
export function ofOneThing(log: LogView, wet: Spans | null): Spans {
  const timed = log.timed.filter(({ heightMa }) => heightMa > OUTSIZED_MA).map(({ spans }) => spans)
  return [log.outsized, log.unexplained?.excursions ?? NO_SPANS, wet ?? NO_SPANS, ...timed].reduce(union, NO_SPANS)
}
