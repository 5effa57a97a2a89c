import { type Series, usualInterval } from '../../timeline/series.ts'
import type { Spans } from '../../timeline/spans.ts'

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
  const inside: number[] = []
  const known: number[] = []
  const extend = (list: number[], from: number, to: number): void => {
    const last = list.length - 1
    if (last > 0 && from <= list[last]!) list[last] = to
    else list.push(from, to)
  }
  for (let i = 0; i < series.t.length; i++) {
    const from = series.t[i]! + shift
    const next = i + 1 < series.t.length ? series.t[i + 1]! + shift : from + hold / 3
    const to = Math.min(next, from + hold)
    if (to <= from) continue
    extend(known, from, to)
    if (above ? series.v[i]! > value : series.v[i]! < value) extend(inside, from, to)
  }
  return { inside: Float64Array.from(inside), known: Float64Array.from(known) }
}

/** At most `n` values spread evenly. */
export function thinned(values: Float64Array, n: number): Float64Array {
  if (values.length <= n) return values
  return Float64Array.from({ length: n }, (_, k) => values[Math.floor((k * (values.length - 1)) / (n - 1))]!)
}
