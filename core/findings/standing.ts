import { GAP_INTERVALS, type Series, usualInterval } from '../timeline/series.ts'
import type { Spans } from '../timeline/spans.ts'

/** Values with the time they held, ascending; ties are one entry. */
export interface HeldLevels {
  readonly values: Float64Array
  /** Time, ms, and number of readings of each value. */
  readonly ms: Float64Array
  readonly counts: Float64Array
  /** Greatest reading; NaN without any. */
  readonly max: number
}

/** More different values than this are put in bins first. */
const MOST_VALUES = 20_000
const BINS = 65_536

/**
 * How long each level held within `within`: every reading stands for the halves of the distances to its neighbours, each
 * at most half the gap limit, so that a logger that speeds up near events does not distort what follows. A log with more than
 * 20,000 different values is put into 65,536 bins of its range, each with its mean. O(n + d log d) for d values.
 */
export function heldLevels(series: Series, within: Spans): HeldLevels {
  const { at, held } = heldReadings(series, within)
  const table = new Map<number, number>()
  const ms: number[] = []
  const counts: number[] = []
  for (let i = 0; i < at.length; i++) {
    const value = series.v[at[i]!]!
    let k = table.get(value)
    if (k === undefined) {
      if (ms.length === MOST_VALUES) return binned(series, at, held)
      k = ms.length
      table.set(value, k)
      ms.push(0)
      counts.push(0)
    }
    ms[k]! += held[i]!
    counts[k]! += 1
  }
  const values = Float64Array.from(table.keys()).sort()
  const index = Array.from(values, (value) => table.get(value)!)
  return {
    values,
    ms: Float64Array.from(index, (k) => ms[k]!),
    counts: Float64Array.from(index, (k) => counts[k]!),
    max: values.at(-1) ?? Number.NaN,
  }
}

interface HeldReadings {
  /** Positions of the readings that lie within. */
  readonly at: Uint32Array
  /** How long each stands for, ms. */
  readonly held: Float64Array
}

function heldReadings({ t, v }: Series, within: Spans): HeldReadings {
  const slow = slowInterval({ t, v })
  const most = (GAP_INTERVALS * slow) / 2
  const at = new Uint32Array(t.length)
  const held = new Float64Array(t.length)
  let n = 0
  let s = 0
  for (let i = 0; i < t.length; i++) {
    const here = t[i]!
    while (s < within.length && within[s + 1]! <= here) s += 2
    if (s >= within.length) break
    if (here < within[s]!) continue
    const left = Math.min(most, i > 0 ? (here - t[i - 1]!) / 2 : slow / 2, here - within[s]!)
    const right = Math.min(most, i + 1 < t.length ? (t[i + 1]! - here) / 2 : slow / 2, within[s + 1]! - here)
    at[n] = i
    held[n++] = left + right
  }
  return { at: at.subarray(0, n), held: held.subarray(0, n) }
}

/** Distances longer than this, or three usual ones, are gaps in any log, ms. */
const GAP_MS = 10 * 60_000

/**
 * The distance of readings that holds for half of the logged time, ms. Where a logger speeds up near events most
 * readings stand close together, and the usual interval would cut down the quiet time between. One second without two readings.
 */
function slowInterval(series: Series): number {
  const { t } = series
  const n = t.length - 1
  if (n < 1) return 1_000
  const limit = Math.max(GAP_INTERVALS * usualInterval(series), GAP_MS)
  const stride = Math.max(1, Math.floor(n / 5_000))
  const distances: number[] = []
  let total = 0
  for (let i = 0; i < n; i += stride) {
    const distance = t[i + 1]! - t[i]!
    if (distance > limit) continue
    distances.push(distance)
    total += distance
  }
  distances.sort((a, b) => a - b)
  let below = 0
  for (const distance of distances) {
    below += distance
    if (below >= total / 2) return distance
  }
  return usualInterval(series)
}

function binned({ v }: Series, at: Uint32Array, held: Float64Array): HeldLevels {
  let min = Number.POSITIVE_INFINITY
  let max = Number.NEGATIVE_INFINITY
  for (const i of at) {
    min = Math.min(min, v[i]!)
    max = Math.max(max, v[i]!)
  }
  const ms = new Float64Array(BINS)
  const sums = new Float64Array(BINS)
  const counts = new Float64Array(BINS)
  const scale = (BINS - 1) / (max - min)
  for (let i = 0; i < at.length; i++) {
    const value = v[at[i]!]!
    const bin = Math.floor((value - min) * scale)
    ms[bin]! += held[i]!
    sums[bin]! += value
    counts[bin]! += 1
  }
  const used = Uint32Array.from({ length: BINS }, (_, k) => k).filter((k) => counts[k]! > 0)
  return {
    values: Float64Array.from(used, (k) => sums[k]! / counts[k]!),
    ms: Float64Array.from(used, (k) => ms[k]!),
    counts: Float64Array.from(used, (k) => counts[k]!),
    max,
  }
}

/**
 * Quantiles of levels by the time they held: Hyndman & Fan's type 8 carried over to weights. The k-th reading sits at
 * probability (C + w/2 + w̄/6) / (W + w̄/3), C the time below it, w its own, w̄ the mean, W all; between such points it is
 * linear. With equal weights that is (k − 1/3) / (n + 1/3). NaN without any level.
 *
 * @see Hyndman & Fan (1996), The American Statistician 50, 361-365
 */
export function heldQuantile(levels: HeldLevels, p: number): number {
  const { values, ms, counts } = levels
  let total = 0
  let n = 0
  for (let k = 0; k < values.length; k++) {
    total += ms[k]!
    n += counts[k]!
  }
  if (!(total > 0)) return values.length === 0 ? Number.NaN : values[values.length >> 1]!
  const mean = total / n
  const target = p * (total + mean / 3) - mean / 6
  let below = 0
  let lastEnd = Number.NEGATIVE_INFINITY
  let last = values[0]!
  for (let k = 0; k < values.length; k++) {
    const one = ms[k]! / counts[k]!
    // A tie is a plateau from its first reading to its last.
    const start = below + one / 2
    const end = below + ms[k]! - one / 2
    if (target <= end) {
      if (target >= start || lastEnd === Number.NEGATIVE_INFINITY) return values[k]!
      return last + ((values[k]! - last) * (target - lastEnd)) / (start - lastEnd)
    }
    below += ms[k]!
    lastEnd = end
    last = values[k]!
  }
  return last
}
