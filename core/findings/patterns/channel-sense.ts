import { quantile } from '../../statistics/quantile.ts'
import type { Series } from '../../timeline/series.ts'
import { thinned } from '../windows/held.ts'

/** What a channel can read at all. */
export interface Possible {
  readonly name: string
  readonly low: number
  readonly high: number
}

/** Readings that cannot be, above which share the channel is not believed. */
const MOST_IMPOSSIBLE = 0.05

/**
 * The readings of a channel that can be, or in words why there is nothing to learn from it: not logged, not changing,
 * impossible. Linear in readings.
 */
export function sensible(
  series: Series | null,
  { name, low, high }: Possible,
): { readonly series: Series; readonly refused: null } | { readonly series: null; readonly refused: string } {
  if (series === null || series.t.length === 0) return { series: null, refused: `No ${name} is logged.` }
  let possible = 0
  for (let i = 0; i < series.v.length; i++) if (series.v[i]! >= low && series.v[i]! <= high) possible++
  if (series.v.length - possible > MOST_IMPOSSIBLE * series.v.length) {
    return { series: null, refused: `The ${name} read is mostly impossible: check its channel.` }
  }
  const isPossible = (_: number, i: number): boolean => series.v[i]! >= low && series.v[i]! <= high
  const kept =
    possible === series.v.length ? series : { t: series.t.filter(isPossible), v: series.v.filter(isPossible) }
  const sample = thinned(kept.v, 5_000)
  const [least, most] = [quantile(sample, 0), quantile(sample, 1)]
  if (most - least <= 1e-9 * Math.max(1, Math.abs(most)))
    return { series: null, refused: `The ${name} did not change.` }
  return { series: kept, refused: null }
}
