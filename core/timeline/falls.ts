import type { DeadRun } from './dead-runs.ts'
import type { Series } from './series.ts'

/** A stretch without supply that a log of the device shows: of its leakage or of its voltage. */
export interface Fall extends DeadRun {
  readonly log: 'leakage' | 'voltage'
  /** Readings on both sides of the fall are close enough for no gap to lie between. */
  readonly seen: boolean
  /** Switching by hand, or the habit of one load, explains it: the device stayed closed. */
  readonly explained: boolean
}

/** A fall narrower than this in the log is an instant, wider ones stay an interval, ms. */
export const INSTANT_WITHIN = 120_000
/** How long a log must read nothing before it says that the supply is gone, ms. */
const STAYS = 120_000
const STAYS_DENSE = 30_000
const DENSE_READINGS = 3

/** When the supply went, by the log: an instant where its readings are close, else between two readings. */
export function instantOf(fall: Fall, running: readonly Series[]): { readonly from: number; readonly to: number } {
  const lastLive = fall.lastLive ?? fall.from
  if (fall.from - lastLive > INSTANT_WITHIN) return { from: lastLive, to: fall.from }
  const at = firstLoadToStop(running, lastLive, fall.from)
  return { from: at, to: at }
}

/** Whether the log reads nothing for long enough: two minutes, or three readings and half a minute. */
export function stays(run: DeadRun): boolean {
  const length = run.lastDead - run.from
  return run.steady && ((run.count >= 2 && length >= STAYS) || (run.count >= DENSE_READINGS && length >= STAYS_DENSE))
}

/**
 * Loads stop with the supply, and their loggers may see it a moment before the leakage log does. What stops between
 * the last live and the first dead reading marks the instant better than the reading that follows.
 */
function firstLoadToStop(running: readonly Series[], after: number, upTo: number): number {
  let first = upTo
  for (const { t, v } of running) {
    let i = lowerBoundAfter(t, after)
    for (; i < t.length && t[i]! < first; i++) {
      if (i > 0 && v[i]! < 0.5 && v[i - 1]! >= 0.5) first = t[i]!
    }
  }
  return first
}

function lowerBoundAfter(t: Float64Array, ms: number): number {
  let low = 0
  let high = t.length
  while (low < high) {
    const middle = (low + high) >>> 1
    if (t[middle]! <= ms) low = middle + 1
    else high = middle
  }
  return low
}
