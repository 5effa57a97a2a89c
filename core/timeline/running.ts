import type { Exposure } from './exposure.ts'
import { GAP_INTERVALS, type Series, usualInterval } from './series.ts'

const DAY = 86_400_000
/** So much of the readings must differ from the one before for a channel to count as sending only changes. */
const ALTERNATING = 0.9
/** A tenth of the distances is so much longer than another tenth when they are very irregular. */
const IRREGULAR = 3
/** With fewer readings than this, regularity cannot be judged and alternation alone decides. */
const FEW = 9

/** How readings become states and how long a reading speaks for. */
export interface StepRule {
  /** At or above: on. */
  readonly high: number
  /** Below: off. Between the two the state stays as it was. */
  readonly low: number
  /** A reading holds until the next one when that comes within this many ms … */
  readonly limit: number
  /** … else, and after the last reading, for this many ms; at most `limit`. */
  readonly reach: number
}

/**
 * The state of a load by its running channel (0 or 1). A reading holds until the next one when that comes within
 * GAP_INTERVALS usual intervals, else for one usual interval; then the state is unknown. A channel that sends only
 * changes holds until the next reading, at most a day. O(n).
 */
export function exposureOfRunning(series: Series, usual: number = usualInterval(series)): Exposure {
  return stepsOf(series, runningRule(series, usual))
}

/** The rule by which `exposureOfRunning` reads a channel. */
export function runningRule(series: Series, usual: number = usualInterval(series)): StepRule {
  const hold = sendsOnlyChanges(series) ? { limit: DAY, reach: DAY } : holdOf(usual)
  return { high: 0.5, low: 0.5, ...hold }
}

/** How long a reading of a regular logger speaks for. A lone reading speaks for no time at all. */
export function holdOf(usual: number): { readonly limit: number; readonly reach: number } {
  return Number.isNaN(usual) ? { limit: 0, reach: 0 } : { limit: GAP_INTERVALS * usual, reach: usual }
}

/**
 * Whether a 0/1 channel sends only when it changes: nearly every reading differs from the one before and the distances
 * are very irregular. Stops early on the ordinary kind.
 */
export function sendsOnlyChanges({ t, v }: Series): boolean {
  const n = t.length - 1
  if (n < 1) return false
  let repeats = (1 - ALTERNATING) * n
  for (let i = 1; i <= n; i++) {
    if (v[i]! >= 0.5 === v[i - 1]! >= 0.5 && --repeats < 0) return false
  }
  if (t.length < FEW) return true
  const distances = Float64Array.from({ length: n }, (_, i) => t[i + 1]! - t[i]!).sort()
  return distances[Math.floor(0.9 * (n - 1))]! > IRREGULAR * distances[Math.floor(0.1 * (n - 1))]!
}

/** Reads a channel as a step function by a rule. O(n). */
export function stepsOf({ t, v }: Series, { high, low, limit, reach }: StepRule): Exposure {
  const spans: { readonly on: number[]; readonly off: number[] } = { on: [], off: [] }
  if (t.length === 0) return { on: new Float64Array(0), off: new Float64Array(0) }
  const keep = (on: boolean, from: number, to: number): void => {
    const list = on ? spans.on : spans.off
    if (to <= from) return
    if (list.length > 0 && list[list.length - 1] === from) list[list.length - 1] = to
    else list.push(from, to)
  }
  let on = v[0]! >= (high + low) / 2
  let begun = t[0]!
  for (let i = 1; i < t.length; i++) {
    const now = on ? v[i]! >= low : v[i]! >= high
    if (t[i]! - t[i - 1]! > limit) {
      keep(on, begun, t[i - 1]! + reach)
      begun = t[i]!
      on = v[i]! >= (high + low) / 2
    } else if (now !== on) {
      keep(on, begun, t[i]!)
      begun = t[i]!
      on = now
    }
  }
  keep(on, begun, t[t.length - 1]! + reach)
  return { on: Float64Array.from(spans.on), off: Float64Array.from(spans.off) }
}
