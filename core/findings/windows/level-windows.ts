import { quantile } from '../../statistics/quantile.ts'
import type { Series } from '../../timeline/series.ts'
import { intersect, totalMs } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import type { ExposureWindow } from '../line-up.ts'
import { type Frame, MINUTE_MS, normalised, windowOf } from './trip-share.ts'
import { heldAbove, thinned } from './weather-windows.ts'

/** Shares of the time below the level above which headroom counts as used up. */
const CUTS = [0.5, 0.75, 0.9, 0.97] as const
/** The level is that of a few minutes before: the last step of a trip must not speak for what stood there before. */
const LATE_MS = 5 * MINUTE_MS

/** Hours in which the standing leakage was high, as it stood five minutes earlier. */
export function levelWindows(frame: Frame): ExposureWindow[] {
  const { timeline } = frame
  if (timeline.leakage === null || timeline.leakage.t.length < 100) return []
  const slow = minuteLevels(timeline.leakage)
  if (slow.t.length < 100) return []
  const sample = thinned(slow.v, 5_000)
  const windows: (ExposureWindow | null)[] = []
  for (const q of CUTS) {
    const cut = quantile(sample, q)
    const held = heldAbove(slow, cut, true, LATE_MS)
    const window = windowOf(
      frame,
      `above-${q}`,
      `while the standing leakage was above ${cut.toFixed(1)} mA`,
      1 - dominance(timeline, held.inside),
      held.inside,
      held.known,
    )
    windows.push(window)
  }
  return normalised(windows)
}

/**
 * How far high leakage is one thing's doing, 0 to 0.95: the largest share of `inside` in which a single circuit or
 * load was on that is on far less otherwise. What one load brings about is that load's, not "many together".
 */
function dominance(timeline: Timeline, inside: Float64Array): number {
  const energised = intersect(inside, timeline.energised)
  const hours = totalMs(energised)
  const all = totalMs(timeline.energised)
  if (hours === 0 || all === 0) return 0
  let most = 0
  for (const thing of timeline.things) {
    const usual = totalMs(thing.state.on) / all
    if (usual === 0 || usual > 0.6) continue
    const here = totalMs(intersect(thing.state.on, energised)) / hours
    if (here > 1.5 * usual) most = Math.max(most, (here - usual) / (1 - usual))
  }
  return Math.min(0.95, most)
}

/** Mean of each minute that has readings. */
function minuteLevels(leakage: Series): Series {
  const t: number[] = []
  const v: number[] = []
  let minute = Number.NaN
  let sum = 0
  let n = 0
  for (let i = 0; i <= leakage.t.length; i++) {
    const m = i < leakage.t.length ? Math.floor(leakage.t[i]! / MINUTE_MS) : Number.NaN
    if (m !== minute) {
      if (n > 0) {
        t.push(minute * MINUTE_MS)
        v.push(sum / n)
      }
      minute = m
      sum = 0
      n = 0
    }
    if (i < leakage.t.length) {
      sum += leakage.v[i]!
      n++
    }
  }
  return { t: Float64Array.from(t), v: Float64Array.from(v) }
}
