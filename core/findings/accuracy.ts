import type { Channel } from '../contract/site-sheet.ts'
import type { Series } from '../timeline/series.ts'
import type { Timeline } from '../timeline/timeline.ts'

/** Noise of a third of the last place moves about this share of neighbouring readings. */
const DITHERED = 0.3

/** What the clamp can resolve at best: share of the reading, and mA that do not depend on it. */
export interface ClampAccuracy {
  readonly share: number
  readonly fixedMa: number
  /** One digit, mA; 0 when the sheet does not say. */
  readonly digitMa: number
}

/** Accuracy of the clamps that log this device's residual current, the worst of them; zeros when the sheet says nothing. */
export function groupAccuracy(timeline: Timeline): ClampAccuracy {
  const { rcd, sheet } = timeline
  return worst(sheet.channels.filter((c) => c.quantity === 'leakage' && c.rcd === rcd.ref))
}

/** Accuracy of the clamp on one circuit or load. */
export function ownAccuracy(timeline: Timeline, of: string): ClampAccuracy {
  return worst(
    timeline.sheet.channels.filter(
      (c) => c.quantity === 'leakage' && (`circuit:${c.circuit}` === of || `load:${c.load}` === of),
    ),
  )
}

/** Half-width below which no interval for a figure of `ma` may fall: ±(percent of it + digits), at least half a digit. */
export function accuracyOf(accuracy: ClampAccuracy, ma: number): number {
  return Math.max(accuracy.share * Math.abs(ma) + accuracy.fixedMa, accuracy.digitMa / 2)
}

/**
 * Standard uncertainty of a difference of two readings of one clamp, mA: its percentage stays, as an even spread within the stated
 * bounds; the digits are mostly an offset, which cancels, down to the last place of both readings (`lastPlaceMa`).
 *
 * @see JCGM 100:2008 (GUM), 4.3.7
 */
export function differenceError({ share }: ClampAccuracy, ma: number, lastPlaceMa: number): number {
  return Math.hypot((share * ma) / Math.sqrt(3), lastPlaceMa / Math.sqrt(6))
}

/**
 * The step in which a level of many readings is still rounded, mA: the clamp's last place, or 0 where its noise moves so many
 * readings across that their middle tells finer (dither: Widrow & Kollár 2008, chapter 19). Looks at no more than 2,000 pairs.
 */
export function lastPlace({ v }: Series, digitMa: number): number {
  const stride = Math.max(1, Math.floor(v.length / 2_000))
  let moved = 0
  let pairs = 0
  for (let i = 0; i + 1 < v.length; i += stride) {
    pairs++
    if (v[i] !== v[i + 1]) moved++
  }
  return pairs > 0 && moved >= DITHERED * pairs ? 0 : digitMa
}

function worst(channels: readonly Channel[]): ClampAccuracy {
  let share = 0
  let fixedMa = 0
  let digitMa = 0
  for (const { accuracy, resolutionMa = 0 } of channels) {
    digitMa = Math.max(digitMa, resolutionMa)
    share = Math.max(share, (accuracy?.percent ?? 0) / 100)
    fixedMa = Math.max(fixedMa, (accuracy?.digits ?? 0) * resolutionMa)
  }
  return { share, fixedMa, digitMa }
}
