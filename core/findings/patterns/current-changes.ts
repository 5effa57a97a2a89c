import type { Series } from '../../timeline/series.ts'

const MINUTE_MS = 60_000
/** Changes over so many minutes, of at least so many amperes, are compared. */
const APART_MINUTES = 5
const LEAST_AMPS = 1

/** Changes of load current (A) and of leakage (mA) over the same five minutes. */
export interface CurrentChanges {
  readonly amps: Float64Array
  readonly ma: Float64Array
}

/** Pairs the changes of two columns of minute means, those of at least an ampere. Linear. */
export function currentChanges(leakage: Series, loadCurrent: Series): CurrentChanges {
  const amps: number[] = []
  const ma: number[] = []
  let k = 0
  let then = Number.NaN
  for (let i = 0; i < leakage.t.length; i += APART_MINUTES) {
    const at = leakage.t[i]!
    while (k < loadCurrent.t.length && loadCurrent.t[k]! < at) k++
    const now = loadCurrent.t[k] === at ? loadCurrent.v[k]! : Number.NaN
    const change = now - then
    then = now
    if (i === 0 || !(Math.abs(change) >= LEAST_AMPS)) continue
    if (at - leakage.t[i - APART_MINUTES]! > 3 * APART_MINUTES * MINUTE_MS) continue
    amps.push(change)
    ma.push(leakage.v[i]! - leakage.v[i - APART_MINUTES]!)
  }
  return { amps: Float64Array.from(amps), ma: Float64Array.from(ma) }
}
