import { type Series, usualInterval } from '../../timeline/series.ts'
import { type Spans, spansOf } from '../../timeline/spans.ts'

/**
 * Where a sampled quantity lies above (or below) a value; each reading holds until the next, at most three usual
 * intervals. `shift` moves both results later, ms.
 */
export function heldAbove(
  series: Series,
  value: number,
  above: boolean,
  shift: number,
): { inside: Spans; known: Spans } {
  const usual = usualInterval(series)
  const hold = 3 * (Number.isNaN(usual) ? 0 : usual)
  const inside: [number, number][] = []
  const known: [number, number][] = []
  const extend = (list: [number, number][], from: number, to: number): void => {
    const last = list.at(-1)
    if (last !== undefined && from <= last[1]) last[1] = to
    else list.push([from, to])
  }
  for (let i = 0; i < series.t.length; i++) {
    const from = series.t[i]! + shift
    const next = i + 1 < series.t.length ? series.t[i + 1]! + shift : from + hold / 3
    const to = Math.min(next, from + hold)
    if (to <= from) continue
    extend(known, from, to)
    if (above ? series.v[i]! > value : series.v[i]! < value) extend(inside, from, to)
  }
  return { inside: spansOf(inside), known: spansOf(known) }
}

/** At most `n` values spread evenly. */
export function thinned(values: Float64Array, n: number): Float64Array {
  if (values.length <= n) return values
  return Float64Array.from({ length: n }, (_, k) => values[Math.floor((k * (values.length - 1)) / (n - 1))]!)
}
