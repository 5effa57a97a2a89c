import normalCdf from '@stdlib/stats-base-dists-normal-cdf'
import { requireFinite } from './checks.ts'

export interface MannKendall {
  /** Pairs that rise less pairs that fall. */
  readonly s: number
  /** Variance of s without trend, corrected for ties. */
  readonly variance: number
  /** (s − sign s) / √variance; 0 when s or the variance is 0. */
  readonly z: number
  /** Two-sided, normal approximation. */
  readonly p: number
  /** Two-sided, exact; null with ties or more than 60 values, where the approximation is good. */
  readonly pExact: number | null
  /** Kendall's tau-b against time; null when all values are equal. */
  readonly tau: number | null
}

/**
 * Mann–Kendall test: does a series rise or fall? Values in the order of time, equal spacing not needed. Serial correlation
 * makes it too bold, so pass bucket medians. Merge sort counts the falling pairs in O(n log n).
 *
 * @throws {CoreError} not_finite
 * @see Mann (1945), Econometrica 13, 245-259; Kendall (1975), Rank Correlation Methods; Knight (1966), JASA 61, 436-439
 */
export function mannKendall(values: ArrayLike<number>): MannKendall {
  requireFinite('mannKendall', values)
  const n = values.length
  const ascending = Float64Array.from(values)
  const falling = sortCountingInversions(ascending, new Float64Array(n), 0, n)
  let tiedPairs = 0
  let tieTerm = 0
  for (let i = 0; i < n; ) {
    let end = i + 1
    while (end < n && ascending[end] === ascending[i]) end++
    const t = end - i
    tiedPairs += (t * (t - 1)) / 2
    tieTerm += t * (t - 1) * (2 * t + 5)
    i = end
  }
  const pairs = (n * (n - 1)) / 2
  const s = pairs - tiedPairs - 2 * falling
  const variance = (n * (n - 1) * (2 * n + 5) - tieTerm) / 18
  const z = variance > 0 && s !== 0 ? (s - Math.sign(s)) / Math.sqrt(variance) : 0
  return {
    s,
    variance,
    z,
    p: Math.min(1, 2 * normalCdf(-Math.abs(z), 0, 1)),
    pExact: tiedPairs === 0 && n >= 2 && n <= 60 ? exactP(n, Math.min(falling, pairs - falling)) : null,
    tau: pairs > tiedPairs ? s / Math.sqrt((pairs - tiedPairs) * pairs) : null,
  }
}

/** Sorts data[from, to) ascending and returns the number of pairs that were in falling order. */
function sortCountingInversions(data: Float64Array, spare: Float64Array, from: number, to: number): number {
  if (to - from < 2) return 0
  const middle = (from + to) >> 1
  let falling = sortCountingInversions(data, spare, from, middle) + sortCountingInversions(data, spare, middle, to)
  let left = from
  let right = middle
  for (let k = from; k < to; k++) {
    if (right >= to || (left < middle && data[left]! <= data[right]!)) spare[k] = data[left++]!
    else {
      falling += middle - left
      spare[k] = data[right++]!
    }
  }
  data.set(spare.subarray(from, to), from)
  return falling
}

/** Twice the chance of at most `falling` falling pairs among all orders of n values, cut at 1. */
function exactP(n: number, falling: number): number {
  // chance[k] of k falling pairs; each new value adds 0 … m − 1 of them with equal chance.
  let chance = new Float64Array(falling + 1)
  chance[0] = 1
  for (let m = 2; m <= n; m++) {
    const next = new Float64Array(falling + 1)
    let window = 0
    for (let k = 0; k <= falling; k++) {
      window += chance[k]!
      if (k >= m) window -= chance[k - m]!
      next[k] = window / m
    }
    chance = next
  }
  return Math.min(1, 2 * chance.reduce((a, b) => a + b, 0))
}
