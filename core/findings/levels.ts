import { lowerBound, type Series } from '../timeline/series.ts'
import { contains, type Spans } from '../timeline/spans.ts'

/** A median of more readings than this gains nothing: the wander of the level is far larger than their noise. */
const MOST_SAMPLES = 401

/**
 * Level of a stretch: the median of the readings in [from, to), of at most 401 of them spread evenly. NaN with fewer
 * than `least` readings. Unit of the series. O(log n + 401).
 */
export function levelBetween(series: Series, from: number, to: number, least = 1): number {
  const sample = sampleOf(series, from, to)
  if (sample.length < Math.max(1, least)) return Number.NaN
  return medianInPlace(sample)
}

/**
 * Level of a stretch whose readings are rounded: the median of grouped values, which lies within the middle step by the share of readings
 * below and in it, so that noise across a coarse last place still tells tenths of it (Croxton & Cowden 1939, chapter 10). Readings as in
 * `levelBetween`; without ties it is the median.
 */
export function groupedLevelBetween(series: Series, from: number, to: number, least = 1): number {
  const sample = sampleOf(series, from, to)
  const n = sample.length
  if (n < Math.max(1, least)) return Number.NaN
  const middle = medianInPlace(sample)
  let below = 0
  let equal = 0
  let lower = Number.NEGATIVE_INFINITY
  let upper = Number.POSITIVE_INFINITY
  for (const x of sample) {
    if (x < middle) {
      below++
      lower = Math.max(lower, x)
    } else if (x > middle) upper = Math.min(upper, x)
    else equal++
  }
  if (equal < 2) return middle
  const step = Math.min(middle - lower, upper - middle)
  return Number.isFinite(step) ? middle + step * ((n / 2 - below) / equal - 0.5) : middle
}

/** Mean of a stretch, of the same readings as `levelBetween`: what is usual there, however it comes and goes. */
export function meanBetween(series: Series, from: number, to: number, least = 1): number {
  const sample = sampleOf(series, from, to)
  if (sample.length < Math.max(1, least)) return Number.NaN
  return sample.reduce((sum, v) => sum + v, 0) / sample.length
}

function sampleOf(series: Series, from: number, to: number): Float64Array {
  const a = lowerBound(series.t, from)
  const n = Math.max(0, lowerBound(series.t, to) - a)
  const count = Math.min(n, MOST_SAMPLES)
  const sample = new Float64Array(count)
  for (let k = 0; k < count; k++) {
    sample[k] = series.v[a + (count === n ? k : Math.floor((k * (n - 1)) / (count - 1)))]!
  }
  return sample
}

/** The readings of [from, to) that lie in `within`, at most `most` of them, spread evenly. */
export function readingsWithin(series: Series, within: Spans, from: number, to: number, most = 2_000): Series {
  const a = lowerBound(series.t, from)
  const b = lowerBound(series.t, to)
  const stride = Math.max(1, Math.ceil((b - a) / most))
  const t: number[] = []
  const v: number[] = []
  for (let i = a; i < b; i += stride) {
    if (!contains(within, series.t[i]!)) continue
    t.push(series.t[i]!)
    v.push(series.v[i]!)
  }
  return { t: Float64Array.from(t), v: Float64Array.from(v) }
}

/** Median by selection; reorders its input (Hoare 1961, algorithm 65). O(n). */
export function medianInPlace(x: Float64Array): number {
  const n = x.length
  if (n === 0) return Number.NaN
  const half = n >> 1
  const upper = select(x, half)
  if (n % 2 === 1) return upper
  let lower = x[0]!
  for (let i = 1; i < half; i++) if (x[i]! > lower) lower = x[i]!
  return (lower + upper) / 2
}

function select(x: Float64Array, k: number): number {
  let low = 0
  let high = x.length - 1
  while (low < high) {
    const pivot = x[(low + high) >> 1]!
    let i = low
    let j = high
    while (i <= j) {
      while (x[i]! < pivot) i++
      while (x[j]! > pivot) j--
      if (i <= j) {
        const held = x[i]!
        x[i++] = x[j]!
        x[j--] = held
      }
    }
    if (k <= j) high = j
    else if (k >= i) low = i
    else break
  }
  return x[k]!
}
