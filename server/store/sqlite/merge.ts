import { EMPTY_SERIES, type Series } from '../../../core/timeline/series.ts'

/** Two series made one, with the fate of the incoming readings. */
export interface Merged {
  readonly series: Series
  /** Times that were not there before. */
  readonly added: number
  /** Times that were there with another value and have the incoming one now. */
  readonly replaced: number
  readonly repeated: number
  readonly conflicting: number
}

/** Merges readings into those that are there; of two values for one time the held one stays unless `replace`. O(n). */
export function merge(held: Series, incoming: Series, replace: boolean): Merged {
  const n = held.t.length
  const m = incoming.t.length
  if (n === 0) return { series: incoming, added: m, replaced: 0, repeated: 0, conflicting: 0 }
  const t = new Float64Array(n + m)
  const v = new Float64Array(n + m)
  if (m === 0 || held.t[n - 1]! < incoming.t[0]!) {
    t.set(held.t)
    v.set(held.v)
    t.set(incoming.t, n)
    v.set(incoming.v, n)
    return { series: { t, v }, added: m, replaced: 0, repeated: 0, conflicting: 0 }
  }
  let i = 0
  let j = 0
  let k = 0
  let replaced = 0
  let repeated = 0
  let conflicting = 0
  while (i < n || j < m) {
    const a = i < n ? held.t[i]! : Number.POSITIVE_INFINITY
    const b = j < m ? incoming.t[j]! : Number.POSITIVE_INFINITY
    if (a <= b) {
      t[k] = a
      v[k] = held.v[i++]!
      if (a === b) {
        const value = incoming.v[j++]!
        if (value === v[k]) repeated++
        else if (replace) {
          v[k] = value
          replaced++
        } else conflicting++
      }
    } else {
      t[k] = b
      v[k] = incoming.v[j++]!
    }
    k++
  }
  return { series: { t: t.subarray(0, k), v: v.subarray(0, k) }, added: k - n, replaced, repeated, conflicting }
}

/** Two series without a common time as one. */
export function union(a: Series, b: Series): Series {
  if (a.t.length === 0) return b.t.length === 0 ? EMPTY_SERIES : b
  if (b.t.length === 0) return a
  return a.t[0]! <= b.t[0]! ? merge(a, b, false).series : merge(b, a, false).series
}
