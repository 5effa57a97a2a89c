import type { Series } from '../timeline/series.ts'
import { intersect, type Spans, totalMs } from '../timeline/spans.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { heldAbove } from './windows/held.ts'
import { HOUR_MS } from './windows/trip-share.ts'
import type { Drying } from './windows/weather-windows.ts'

/** Correlation of wetness and level below which the level does not go with rain at all. */
const LEAST_CORRELATION = 0.2
/** Wet and dry, as shares of the highest wetness. */
const WET = 0.5
const DRY = 0.05

/** How far the leakage stands higher when it is wet. */
export interface WetLift {
  readonly ma: number
  /** Of the drying law that fits best: half-life and lag, h, and its correlation with the level. */
  readonly halfLife: number
  readonly lag: number
  readonly correlation: number
}

/** The law that goes with the level best. */
export function bestDrying(laws: readonly Drying[]): Drying {
  return laws.reduce((a, b) => (b.correlation > a.correlation ? b : a))
}

/** Mean level in wet hours less that in dry ones, by the drying law that fits best; null without rain in both. Linear. */
export function wetLift(timeline: Timeline, remainder: Series, laws: readonly Drying[]): WetLift | null {
  if (laws.length === 0) return null
  const { wetness, halfLife, lag, correlation } = bestDrying(laws)
  if (correlation < LEAST_CORRELATION) return { ma: 0, halfLife, lag, correlation }
  const peak = wetness.v.reduce((a, b) => Math.max(a, b), 0)
  if (peak <= 0) return null
  const wet = heldAbove(wetness, WET * peak, true, lag * HOUR_MS).inside
  const dry = heldAbove(wetness, DRY * peak, false, lag * HOUR_MS).inside
  const ma =
    meanWithin(remainder, intersect(wet, timeline.energised)) -
    meanWithin(remainder, intersect(dry, timeline.energised))
  return Number.isNaN(ma) ? null : { ma, halfLife, lag, correlation }
}

function meanWithin({ t, v }: Series, spans: Spans): number {
  if (totalMs(spans) === 0) return Number.NaN
  let sum = 0
  let n = 0
  let k = 0
  for (let i = 0; i < spans.length; i += 2) {
    while (k < t.length && t[k]! < spans[i]!) k++
    for (; k < t.length && t[k]! < spans[i + 1]!; k++) {
      sum += v[k]!
      n++
    }
  }
  return n === 0 ? Number.NaN : sum / n
}
