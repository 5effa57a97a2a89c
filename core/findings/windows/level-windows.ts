import { quantile } from '../../statistics/quantile.ts'
import { intersect, type Spans, totalMs } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import type { ExposureWindow } from '../line-up.ts'
import type { LogView } from '../log-view.ts'
import { SOUND_MA } from '../prior-odds.ts'
import { heldAbove, thinned } from './held.ts'
import { type Frame, MINUTE_MS, windowOf } from './trip-share.ts'

/** Shares of the time below the level above which headroom counts as used up. */
const CUTS = [0.5, 0.75, 0.9, 0.97, 0.99] as const
/** The level is that of some minutes before: the last rise to a trip must not speak for what stood there before. */
const LATE_MINUTES = [1, 5] as const
/** High leakage is one thing's doing when that thing, lifting the level by so much of the trip current and more than a sound one, … */
const LARGE_SHARE = 0.12
/** … was on in this share of the high time, and far less otherwise. */
const MOSTLY = 0.8
/** Or when this share of the high time is an excursion that no named load accounts for. */
const MOSTLY_UNEXPLAINED = 0.5

/**
 * Hours in which the standing leakage was high, as it stood one or five minutes earlier, and high by many together: what one
 * load, rain (`wet`, where the leakage rises with it) or an unlisted thing brings about is theirs, and such a window is left out. Priors sum to one at most.
 */
export function levelWindows(frame: Frame, log: LogView, wet: Spans | null): ExposureWindow[] {
  if (log.minutes === null || log.minutes.t.length < 100) return []
  const sample = thinned(log.minutes.v, 20_000)
  const windows: ExposureWindow[] = []
  for (const q of CUTS) {
    const cut = quantile(sample, q)
    for (const minutes of LATE_MINUTES) {
      const held = heldAbove(log.minutes, cut, true, minutes * MINUTE_MS)
      if (isOneThings(frame.timeline, log, wet, held.inside)) continue
      const words = `while the standing leakage was above ${cut.toFixed(1)} mA`
      const prior = 1 / (CUTS.length * LATE_MINUTES.length)
      const window = windowOf(frame, `above-${q}-${minutes}`, words, prior, held.inside, held.known)
      if (window !== null) windows.push(window)
    }
  }
  return windows
}

function isOneThings(timeline: Timeline, log: LogView, wet: Spans | null, inside: Spans): boolean {
  const high = intersect(inside, timeline.energised)
  const hours = totalMs(high)
  const all = totalMs(timeline.energised)
  if (hours === 0) return true
  if (log.unexplained !== null && totalMs(intersect(log.unexplained.excursions, high)) > MOSTLY_UNEXPLAINED * hours)
    return true
  const isMostly = (spans: Spans): boolean => {
    const here = totalMs(intersect(spans, high)) / hours
    return here >= MOSTLY && totalMs(intersect(spans, timeline.energised)) / all <= 0.6 * here
  }
  if (wet !== null && isMostly(wet)) return true
  return timeline.things.some((thing) => {
    const topMa = log.lifts.get(thing.of)?.topMa ?? 0
    if (topMa < LARGE_SHARE * log.tripMa || topMa < SOUND_MA) return false
    return isMostly(thing.state.on)
  })
}
