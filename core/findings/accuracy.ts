import type { Channel } from '../contract/site-sheet.ts'
import type { Timeline } from '../timeline/timeline.ts'

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
