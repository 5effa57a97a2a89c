import type { Series } from '../timeline/series.ts'

const MINUTE_MS = 60_000

/** Mean of each minute that has readings; times are the minutes' beginnings. Linear. */
export function minuteLevels(series: Series): Series {
  const t: number[] = []
  const v: number[] = []
  let minute = Number.NaN
  let sum = 0
  let n = 0
  for (let i = 0; i <= series.t.length; i++) {
    const m = i < series.t.length ? Math.floor(series.t[i]! / MINUTE_MS) : Number.NaN
    if (m !== minute) {
      if (n > 0) {
        t.push(minute * MINUTE_MS)
        v.push(sum / n)
      }
      minute = m
      sum = 0
      n = 0
    }
    if (i < series.t.length) {
      sum += series.v[i]!
      n++
    }
  }
  return { t: Float64Array.from(t), v: Float64Array.from(v) }
}
