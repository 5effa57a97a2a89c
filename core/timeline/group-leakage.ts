import type { Channel } from '../contract/site-sheet.ts'
import { gapLimit, type Series, seriesOf } from './series.ts'

/** A level of leakage and the parts it was made of. */
export interface Leakage {
  /** r.m.s. channel, or phasor sum of both parts; null when neither is logged. */
  readonly level: Series | null
  readonly conductive: Series | null
  readonly capacitive: Series | null
  readonly notes: readonly string[]
}

/**
 * The leakage that the channels of one place (a device, circuit or load) tell. Direct current is left out: it does not
 * add to what an a.c. clamp reads. Of several r.m.s. channels the one with most readings speaks.
 */
export function leakageOf(channels: readonly Channel[], series: ReadonlyMap<string, Series>): Leakage {
  const notes: string[] = []
  const pick = (reading: 'rms' | 'conductive' | 'capacitive'): Series | null => {
    const found = channels.filter(
      (c) => c.quantity === 'leakage' && (c.reading ?? 'rms') === reading && (series.get(c.ref)?.t.length ?? 0) > 0,
    )
    if (found.length === 0) return null
    const best = found.reduce((a, b) => (series.get(b.ref)!.t.length > series.get(a.ref)!.t.length ? b : a))
    if (found.length > 1)
      notes.push(`Channels ${found.map((c) => c.ref).join(', ')} log the same leakage: ${best.ref} is used.`)
    return series.get(best.ref)!
  }
  const rms = pick('rms')
  const conductive = pick('conductive')
  const capacitive = pick('capacitive')
  if (rms !== null) return { level: rms, conductive, capacitive, notes }
  if (conductive !== null && capacitive !== null)
    return { level: phasorSeries(conductive, capacitive), conductive, capacitive, notes }
  if (conductive !== null || capacitive !== null)
    notes.push(`Only the ${conductive === null ? 'capacitive' : 'conductive'} part of the leakage is logged: no level.`)
  return { level: null, conductive, capacitive, notes }
}

/**
 * √(G² + B²) at each conductive reading that has a capacitive one near enough in time (half a usual interval of
 * the slower channel would do; at most its gap limit). O(n).
 */
export function phasorSeries(conductive: Series, capacitive: Series): Series | null {
  const limit = Math.max(gapLimit(conductive) || 0, gapLimit(capacitive) || 0)
  const t: number[] = []
  const v: number[] = []
  const other = capacitive.t
  let j = 0
  for (let i = 0; i < conductive.t.length; i++) {
    const at = conductive.t[i]!
    while (j + 1 < other.length && Math.abs(other[j + 1]! - at) <= Math.abs(other[j]! - at)) j++
    if (j >= other.length || Math.abs(other[j]! - at) > limit) continue
    t.push(at)
    v.push(Math.hypot(conductive.v[i]!, capacitive.v[j]!))
  }
  return t.length === 0 ? null : seriesOf(t, v)
}
