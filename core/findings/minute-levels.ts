import type { Series } from '../timeline/series.ts'

const MINUTE_MS = 60_000

/** Mean of each minute that has readings; times are the minutes' beginnings. Linear. */
export function minuteLevels(series: Series): Series {
  const n = series.t.length
  const span = n === 0 ? 0 : Math.floor(series.t[n - 1]! / MINUTE_MS) - Math.floor(series.t[0]! / MINUTE_MS) + 1
  const t = new Float64Array(Math.min(n, span))
  const v = new Float64Array(Math.min(n, span))
  let count = 0
  for (let i = 0; i < n; ) {
    const minute = Math.floor(series.t[i]! / MINUTE_MS)
    const end = (minute + 1) * MINUTE_MS
    const begun = i
    let sum = 0
    while (i < n && series.t[i]! < end) sum += series.v[i++]!
    t[count] = minute * MINUTE_MS
    v[count++] = sum / (i - begun)
  }
  return { t: t.slice(0, count), v: v.slice(0, count) }
}
