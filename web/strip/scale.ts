import type { Trace } from '../../core/contract/readings.ts'

/** Top of the current axis, mA: room for the trip current's band and for all readings, never below 1.15 × the trip current. */
export function topOfScale(trace: Trace | null, tripHigh: number): number {
  let greatest = 0
  for (const value of trace?.v ?? []) {
    if (value !== null && value > greatest) greatest = value
  }
  return Math.max(tripHigh * 1.12, greatest * 1.05, 1)
}
