import type { Exposure } from './exposure.ts'
import { holdOf, type StepRule, stepsOf } from './running.ts'
import { type Series, usualInterval } from './series.ts'

/** Currents closer together than this are noise or standby of one level, A. */
const LEAST_STEP_A = 0.05
/** The levels lie so many times farther apart than both scatter (median absolute deviations, added). */
const LEAST_CONTRAST = 3
/** At most this part of the readings lies in the middle third between two real levels. */
const MOST_BETWEEN = 0.12
/** "Off" carries at most this part of the current of "on". */
const MOST_STANDBY = 0.35
/** Above this part of the way from low to high a load is on, below the other it is off. */
const ON_ABOVE = 0.4
const OFF_BELOW = 0.2
const SAMPLE = 10_001

/** Two levels of a current, A. */
export interface TwoLevels {
  readonly low: number
  readonly high: number
}

/** The state of a load by its current, with hysteresis; null when the current does not show two levels. O(n). */
export function exposureOfLoadCurrent(series: Series, usual: number = usualInterval(series)): Exposure | null {
  const rule = loadCurrentRule(series, usual)
  return rule === null ? null : stepsOf(series, rule)
}

/** The rule by which `exposureOfLoadCurrent` reads a channel; null when the current does not show two levels. */
export function loadCurrentRule(series: Series, usual: number = usualInterval(series)): StepRule | null {
  const levels = twoLevels(series)
  if (levels === null) return null
  const step = levels.high - levels.low
  return { high: levels.low + ON_ABOVE * step, low: levels.low + OFF_BELOW * step, ...holdOf(usual) }
}

/**
 * Splits currents into two levels where the variance between the classes is greatest (Otsu 1979, IEEE Trans. SMC 9,
 * 62–66), on at most 10,001 readings spread evenly, and takes the medians. Null unless the levels stand well clear of
 * their scatter, hardly anything lies between, and the low one is little beside the high one.
 */
export function twoLevels({ v }: Series): TwoLevels | null {
  const n = Math.min(v.length, SAMPLE)
  if (n < 4) return null
  const x = Float64Array.from({ length: n }, (_, k) => v[Math.floor((k * (v.length - 1)) / (n - 1))]!).sort()
  const cut = otsuCut(x)
  const lower = x.subarray(0, cut)
  const upper = x.subarray(cut)
  if (lower.length === 0 || upper.length === 0) return null
  const low = middle(lower)
  const high = middle(upper)
  const step = high - low
  let between = 0
  for (const value of x) if (value > low + step / 3 && value < high - step / 3) between++
  const scatter = deviation(lower, low) + deviation(upper, high)
  const clear = step >= LEAST_STEP_A && step >= LEAST_CONTRAST * scatter && between <= MOST_BETWEEN * n
  return clear && Math.abs(low) <= MOST_STANDBY * high ? { low, high } : null
}

function otsuCut(sorted: Float64Array): number {
  const n = sorted.length
  let total = 0
  for (const value of sorted) total += value
  let sum = 0
  let best = 0
  let cut = 0
  for (let i = 1; i < n; i++) {
    sum += sorted[i - 1]!
    if (sorted[i] === sorted[i - 1]) continue
    const between = i * (n - i) * (sum / i - (total - sum) / (n - i)) ** 2
    if (between > best) {
      best = between
      cut = i
    }
  }
  return cut
}

function middle(sorted: Float64Array): number {
  return sorted[sorted.length >>> 1]!
}

function deviation(values: Float64Array, centre: number): number {
  return middle(values.map((value) => Math.abs(value - centre)).sort())
}
