import type { Trace } from '../../core/contract/readings.ts'

/** The last drawn value at or before an instant; null in a gap, before the first reading and past the last. O(log n). */
export function valueAt(trace: Trace, t: number): number | null {
  const times = trace.t
  let low = 0
  let high = times.length
  while (low < high) {
    const middle = (low + high) >>> 1
    if (times[middle]! <= t) low = middle + 1
    else high = middle
  }
  if (low === 0 || low === times.length) {
    return low > 0 && times[low - 1] === t ? (trace.v[low - 1] ?? null) : null
  }
  return trace.v[low - 1] ?? null
}
