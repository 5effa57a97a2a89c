import type { Timeline } from '../timeline/timeline.ts'

const HOUR_MS = 3_600_000

/** Hours of supply from the beginning of the span to an instant: the clock of a timer that stands still while the device is open. */
export function energisedClock(timeline: Timeline): (ms: number) => number {
  const { energised } = timeline
  const before = new Float64Array(energised.length / 2 + 1)
  for (let i = 0; i < energised.length; i += 2) before[i / 2 + 1] = before[i / 2]! + energised[i + 1]! - energised[i]!
  return (ms) => {
    let low = 0
    let high = energised.length / 2
    while (low < high) {
      const middle = (low + high) >>> 1
      if (energised[2 * middle + 1]! < ms) low = middle + 1
      else high = middle
    }
    const within = 2 * low < energised.length ? Math.max(0, ms - energised[2 * low]!) : 0
    return (before[low]! + within) / HOUR_MS
  }
}
