import { Columns } from './columns.ts'
import { EMPTY_SERIES, GAP_INTERVALS, type Series, sliceSeries, usualInterval } from './series.ts'

/**
 * The readings of [from, to) as a line of at most `columns` pixels needs them: all of them when there are no more than
 * four for each column, else first, least, greatest and last of each column. One NaN stands in each gap longer than
 * three usual intervals of the span. O(n).
 */
export function traceColumns(series: Series, from: number, to: number, columns: number): Series {
  const span = from < to ? sliceSeries(series, from, to) : EMPTY_SERIES
  const gapMs = GAP_INTERVALS * usualInterval(span)
  if (span.t.length <= 4 * columns) return breakGaps(span, gapMs)
  const gathered = new Columns(from, to, columns)
  gathered.addReadings(span)
  return gathered.finish(gapMs)
}

/** A series with one NaN halfway in each gap longer than `gapMs`; none when that is NaN. Always fresh arrays. */
function breakGaps({ t, v }: Series, gapMs: number): Series {
  let gaps = 0
  for (let i = 1; i < t.length; i++) if (t[i]! - t[i - 1]! > gapMs) gaps++
  if (gaps === 0) return { t: t.slice(), v: v.slice() }
  const outT = new Float64Array(t.length + gaps)
  const outV = new Float64Array(t.length + gaps)
  let n = 0
  for (let i = 0; i < t.length; i++) {
    if (i > 0 && t[i]! - t[i - 1]! > gapMs) {
      outT[n] = (t[i]! + t[i - 1]!) / 2
      outV[n++] = Number.NaN
    }
    outT[n] = t[i]!
    outV[n++] = v[i]!
  }
  return { t: outT, v: outV }
}
