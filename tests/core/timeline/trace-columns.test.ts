import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { Columns } from '../../../core/timeline/columns.ts'
import { type Series, seriesOf, sliceSeries, usualInterval } from '../../../core/timeline/series.ts'
import { traceColumns } from '../../../core/timeline/trace-columns.ts'

// Values on a coarse grid, so that equal extremes happen often; times uneven, so that gaps happen too.
const anySeries = fc
  .array(
    fc.record({ step: fc.oneof(fc.constant(10), fc.integer({ min: 1, max: 90 })), v: fc.integer({ min: -5, max: 5 }) }),
    {
      maxLength: 400,
    },
  )
  .map((steps) => {
    let t = 1_000
    return seriesOf(
      steps.map((s) => {
        t += s.step
        return t
      }),
      steps.map((s) => s.v / 4),
    )
  })

/** The definition, reading by reading. */
function bruteForce(series: Series, from: number, to: number, columns: number): [number, number][] {
  const { t, v } = sliceSeries(series, from, to)
  const gapMs = 3 * usualInterval({ t, v })
  const all = [...t].map((time, i): [number, number] => [time, v[i]!])
  const out: [number, number][] = []
  const put = (points: [number, number][]): void => {
    for (const point of points) {
      const before = out.at(-1)
      if (before !== undefined && point === points[0] && point[0] - before[0] > gapMs) {
        out.push([(before[0] + point[0]) / 2, Number.NaN])
      }
      out.push(point)
    }
  }
  if (all.length <= 4 * columns) {
    for (const point of all) put([point])
    return out
  }
  for (let c = 0; c < columns; c++) {
    const inside = all.filter(([time]) => Math.floor(((time - from) * columns) / (to - from)) === c)
    if (inside.length === 0) continue
    const least = inside.reduce((a, b) => (b[1] < a[1] ? b : a))
    const greatest = inside.reduce((a, b) => (b[1] > a[1] ? b : a))
    put([...new Set([inside[0]!, least, greatest, inside.at(-1)!])].sort((a, b) => a[0] - b[0]))
  }
  return out
}

const points = ({ t, v }: Series): [number, number][] => [...t].map((time, i) => [time, v[i]!])

describe('traceColumns', () => {
  it('gives first, least, greatest and last of each column, as counted reading by reading', () => {
    fc.assert(
      fc.property(
        anySeries,
        fc.integer({ min: 0, max: 2_000 }),
        fc.integer({ min: 1, max: 20_000 }),
        fc.integer({ min: 1, max: 12 }),
        (series, from, width, columns) => {
          const trace = traceColumns(series, from, from + width, columns)
          expect(points(trace)).toEqual(bruteForce(series, from, from + width, columns))
        },
      ),
      { numRuns: 500 },
    )
  })

  it('gathers the same from summaries and pieces in any order', () => {
    fc.assert(
      fc.property(
        anySeries,
        fc.array(fc.nat(400), { maxLength: 8 }),
        fc.integer({ min: 1, max: 12 }),
        (series, cuts, columns) => {
          fc.pre(series.t.length > 0)
          const to = series.t.at(-1)! + 1
          const whole = new Columns(0, to, columns)
          whole.addReadings(series)
          const pieces = new Columns(0, to, columns)
          const edges = [...new Set([0, ...cuts.filter((c) => c < series.t.length), series.t.length])].sort(
            (a, b) => b - a,
          )
          for (let k = 1; k < edges.length; k++) {
            const t = series.t.subarray(edges[k], edges[k - 1])
            const v = series.v.subarray(edges[k], edges[k - 1])
            const last = t.length - 1
            if (pieces.columnOf(t[0]!) === pieces.columnOf(t[last]!)) {
              const min = v.indexOf(Math.min(...v))
              const max = v.indexOf(Math.max(...v))
              pieces.addSummary({
                tFirst: t[0]!,
                vFirst: v[0]!,
                tMin: t[min]!,
                vMin: v[min]!,
                tMax: t[max]!,
                vMax: v[max]!,
                tLast: t[last]!,
                vLast: v[last]!,
              })
            } else pieces.addReadings({ t, v })
          }
          expect(points(pieces.finish(30))).toEqual(points(whole.finish(30)))
        },
      ),
    )
  })

  it('holds one NaN inside each gap longer than three usual intervals', () => {
    const trace = traceColumns(seriesOf([0, 10, 20, 50, 81, 91], [1, 2, 3, 4, 5, 6]), 0, 100, 10)
    expect(points(trace)).toEqual([
      [0, 1],
      [10, 2],
      [20, 3],
      [50, 4],
      [65.5, Number.NaN],
      [81, 5],
      [91, 6],
    ])
  })

  it('leaves its input alone and gives nothing for an empty or upside-down span', () => {
    const series = seriesOf([0, 10], [1, 2])
    expect(traceColumns(series, 20, 30, 5).t).toHaveLength(0)
    expect(traceColumns(series, 10, 0, 5).t).toHaveLength(0)
    expect(points(series)).toEqual([
      [0, 1],
      [10, 2],
    ])
  })
})
