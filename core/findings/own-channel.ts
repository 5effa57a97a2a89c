import type { Series } from '../timeline/series.ts'
import { intersect } from '../timeline/spans.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { accuracyOf, ownAccuracy } from './accuracy.ts'
import { levelBetween } from './levels.ts'
import { heldLevels, heldQuantile } from './standing.ts'

const HOUR_MS = 3_600_000

/** What a thing's own leakage channel says, mA. */
export interface ChannelFigure {
  readonly ma: number
  readonly low: number
  readonly high: number
}

/**
 * A circuit's or load's own clamp: the level that held for half of the time while it was on, with the order-statistic
 * interval of its hourly medians (90 %; the whole range below six hours), never narrower than the clamp's accuracy.
 * Null when the channel has no reading while the thing was on.
 */
export function channelFigure(timeline: Timeline, of: string, own: Series): ChannelFigure | null {
  const thing = timeline.things.find((t) => t.of === of)
  if (thing === undefined) return null
  const on = intersect(thing.state.on, timeline.energised)
  const levels = heldLevels(own, on.length > 0 ? on : timeline.energised)
  const ma = heldQuantile(levels, 0.5)
  if (Number.isNaN(ma)) return null
  const hourly: number[] = []
  for (let i = 0; i < on.length; i += 2) {
    for (let from = on[i]!; from < on[i + 1]!; from += HOUR_MS) {
      const level = levelBetween(own, from, Math.min(from + HOUR_MS, on[i + 1]!))
      if (!Number.isNaN(level)) hourly.push(level)
    }
  }
  hourly.sort((a, b) => a - b)
  const n = hourly.length
  // Normal approximation of the binomial ranks round a median (David & Nagaraja 2003, section 7.1).
  const rank = n < 6 ? 0 : Math.max(0, Math.floor((n - 1.645 * Math.sqrt(n)) / 2))
  const floor = accuracyOf(ownAccuracy(timeline, of), ma)
  return {
    ma,
    low: Math.min(hourly[rank] ?? ma, ma - floor),
    high: Math.max(hourly[n - 1 - rank] ?? ma, ma + floor),
  }
}
