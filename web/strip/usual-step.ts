import type { Trace } from '../../core/contract/readings.ts'

/** Median distance of neighbouring readings, ms; 0 with fewer than two. */
export function usualStep(trace: Pick<Trace, 't'>): number {
  const steps = trace.t.slice(1).map((t, i) => t - trace.t[i]!)
  steps.sort((a, b) => a - b)
  return steps[steps.length >> 1] ?? 0
}
