import { lowerBound, type Series } from './series.ts'

/** A run of readings known by its summary only: first, least, greatest and last. */
export interface RunSummary {
  readonly tFirst: number
  readonly vFirst: number
  readonly tMin: number
  readonly vMin: number
  readonly tMax: number
  readonly vMax: number
  readonly tLast: number
  readonly vLast: number
}

/**
 * Gathers first, least, greatest and last reading of each of `columns` equal parts of [from, to): a line through them
 * covers the same pixels as one through all readings (M4: Jugel et al., VLDB 2014). Takes readings and summaries in
 * any order, each reading once. Of equal extremes the earliest stands. About 2 ns a reading.
 */
export class Columns {
  readonly #from: number
  readonly #width: number
  readonly #columns: number
  readonly #tFirst: Float64Array
  readonly #vFirst: Float64Array
  readonly #tMin: Float64Array
  readonly #vMin: Float64Array
  readonly #tMax: Float64Array
  readonly #vMax: Float64Array
  readonly #tLast: Float64Array
  readonly #vLast: Float64Array

  constructor(from: number, to: number, columns: number) {
    this.#from = from
    this.#width = to - from
    this.#columns = columns
    this.#tFirst = new Float64Array(columns).fill(Number.POSITIVE_INFINITY)
    this.#vFirst = new Float64Array(columns)
    this.#tMin = new Float64Array(columns)
    this.#vMin = new Float64Array(columns).fill(Number.POSITIVE_INFINITY)
    this.#tMax = new Float64Array(columns)
    this.#vMax = new Float64Array(columns).fill(Number.NEGATIVE_INFINITY)
    this.#tLast = new Float64Array(columns).fill(Number.NEGATIVE_INFINITY)
    this.#vLast = new Float64Array(columns)
  }

  /** The column of an instant; below 0 or at `columns` and above outside of the span. */
  columnOf(t: number): number {
    return Math.floor(((t - this.#from) * this.#columns) / this.#width)
  }

  /** Takes the readings of an ordered series that lie within the span. */
  addReadings(series: Series): void {
    const { t, v } = series
    let i = lowerBound(t, this.#from)
    const end = lowerBound(t, this.#from + this.#width)
    while (i < end) {
      const column = Math.min(this.columnOf(t[i]!), this.#columns - 1)
      const stop = this.#endOfColumn(t, i, end, column)
      let min = i
      let max = i
      let low = v[i]!
      let high = low
      for (let j = i + 1; j < stop; j++) {
        const x = v[j]!
        if (x < low) {
          low = x
          min = j
        } else if (x > high) {
          high = x
          max = j
        }
      }
      this.#add(column, t[i]!, v[i]!, t[min]!, low, t[max]!, high, t[stop - 1]!, v[stop - 1]!)
      i = stop
    }
  }

  /** Takes a run that lies wholly within the span and within one column. */
  addSummary(run: RunSummary): void {
    const column = Math.min(this.columnOf(run.tFirst), this.#columns - 1)
    this.#add(column, run.tFirst, run.vFirst, run.tMin, run.vMin, run.tMax, run.vMax, run.tLast, run.vLast)
  }

  /**
   * What was gathered, in order of time, each reading once; where neighbouring columns' readings lie further apart
   * than `gapMs`, one NaN stands halfway between. A gap within a column is narrower than a pixel and not shown.
   */
  finish(gapMs: number): Series {
    const t = new Float64Array(5 * this.#columns)
    const v = new Float64Array(5 * this.#columns)
    let n = 0
    const put = (time: number, value: number): void => {
      if (n > 0 && t[n - 1] === time) return
      t[n] = time
      v[n++] = value
    }
    for (let c = 0; c < this.#columns; c++) {
      const first = this.#tFirst[c]!
      if (first === Number.POSITIVE_INFINITY) continue
      if (n > 0 && first - t[n - 1]! > gapMs) put((first + t[n - 1]!) / 2, Number.NaN)
      put(first, this.#vFirst[c]!)
      const minFirst = this.#tMin[c]! <= this.#tMax[c]!
      if (minFirst) put(this.#tMin[c]!, this.#vMin[c]!)
      put(this.#tMax[c]!, this.#vMax[c]!)
      if (!minFirst) put(this.#tMin[c]!, this.#vMin[c]!)
      put(this.#tLast[c]!, this.#vLast[c]!)
    }
    return { t: t.slice(0, n), v: v.slice(0, n) }
  }

  /** First index after `i` whose reading lies in a later column: doubling steps, then halving. */
  #endOfColumn(t: Float64Array, i: number, end: number, column: number): number {
    let low = i + 1
    let step = 1
    while (low + step < end && this.columnOf(t[low + step]!) <= column) {
      low += step
      step *= 2
    }
    let high = Math.min(low + step, end)
    while (low < high) {
      const middle = (low + high) >>> 1
      if (this.columnOf(t[middle]!) <= column) low = middle + 1
      else high = middle
    }
    return column === this.#columns - 1 ? end : low
  }

  #add(
    c: number,
    tFirst: number,
    vFirst: number,
    tMin: number,
    vMin: number,
    tMax: number,
    vMax: number,
    tLast: number,
    vLast: number,
  ): void {
    if (tFirst < this.#tFirst[c]!) {
      this.#tFirst[c] = tFirst
      this.#vFirst[c] = vFirst
    }
    if (vMin < this.#vMin[c]! || (vMin === this.#vMin[c]! && tMin < this.#tMin[c]!)) {
      this.#tMin[c] = tMin
      this.#vMin[c] = vMin
    }
    if (vMax > this.#vMax[c]! || (vMax === this.#vMax[c]! && tMax < this.#tMax[c]!)) {
      this.#tMax[c] = tMax
      this.#vMax[c] = vMax
    }
    if (tLast > this.#tLast[c]!) {
      this.#tLast[c] = tLast
      this.#vLast[c] = vLast
    }
  }
}
