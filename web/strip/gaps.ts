import type { Trace } from '../../core/contract/readings.ts'
import type { View } from './view.ts'

/** Stretches of a trace without readings: from the reading before a null to the one after it. */
export function gapsOf(trace: Trace): View[] {
  const gaps: View[] = []
  for (let i = 0; i < trace.v.length; i++) {
    if (trace.v[i] !== null) continue
    const from = trace.t[Math.max(0, i - 1)]!
    while (i + 1 < trace.v.length && trace.v[i + 1] === null) i++
    const to = trace.t[Math.min(trace.t.length - 1, i + 1)]!
    if (to > from) gaps.push({ from, to })
  }
  return gaps
}
