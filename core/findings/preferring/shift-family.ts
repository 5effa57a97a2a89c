import { seededRandom } from '../../statistics/random.ts'
import { lowerBound } from '../../timeline/series.ts'
import { type Spans, totalMs } from '../../timeline/spans.ts'

/** One suspect with every window that was tried for it, as energised time. */
export interface Family {
  readonly of: string
  readonly windows: readonly Spans[]
}

/** Energised time is cut into cells so long at least, ms, and into so many at most. */
const CELL_MS = 5_000
const MOST_CELLS = 1 << 18
/** A trip known as an interval stands at so many points of it. */
const POINTS = 4
/** Shifts: as many as this many looks at a trip allow, within limits. */
const LOOKS = 40_000
const LEAST_SHIFTS = 199
const SHORT = 64
const MOST_SHIFTS = 999

/**
 * By suspect, the chance that the best of all windows of all suspects would fit as well as its own best one if trips and exposures had
 * nothing to do with each other: the trips are shifted together round energised time, which keeps their rhythm and that of the
 * exposures, and the largest statistic over every window is taken anew each time. So whatever was tried is paid for. The statistic is
 * the likelihood ratio of more trips inside than the window's share of the time. Shifts are seeded; the least possible p is one over their
 * number plus one. Cost: windows × (cells + shifts × trips).
 *
 * @see Westfall & Young (1993), Resampling-Based Multiple Testing (largest statistic)
 * @see Besag & Clifford (1989), Biometrika 76, 633-642 (Monte Carlo p); the circular shift is common in ecology and neuroscience
 */
export function shiftFamily(
  energised: Spans,
  trips: readonly { readonly from: number; readonly to: number }[],
  families: readonly Family[],
  seed: string,
): Map<string, number> {
  const found = new Map<string, number>()
  const total = totalMs(energised)
  const n = trips.length
  if (n === 0 || total <= 0) return found
  const cells = Math.max(64, Math.min(MOST_CELLS, Math.ceil(total / CELL_MS)))
  const axis = energisedAxis(energised, cells / total)
  const points = tripPoints(energised, axis, trips, cells)
  const random = seededRandom(`shifts ${seed}`)
  const count = Math.max(LEAST_SHIFTS, Math.min(MOST_SHIFTS, Math.floor(LOOKS / points.cell.length)))
  const shifts = Uint32Array.from({ length: count }, () => random.integer(cells))
  const largest = new Float64Array(count)
  const raster = new Uint8Array(cells)
  const seen = new Map<Spans, number>()
  const own = new Map<string, number>()
  for (const { of, windows } of families) {
    let best = 0
    for (const window of windows) {
      let observed = seen.get(window)
      if (observed === undefined) {
        const share = fill(raster, window, axis) / cells
        observed = share > 0 && share < 1 ? likelihoodRatio(hits(raster, points, 0), n, share) : 0
        if (share > 0 && share < 1) {
          for (let s = 0; s < count; s++) {
            const t = likelihoodRatio(hits(raster, points, shifts[s]!), n, share)
            if (t > largest[s]!) largest[s] = t
          }
        }
        seen.set(window, observed)
      }
      if (observed > best) best = observed
    }
    own.set(of, best)
  }
  largest.sort()
  for (const [of, t] of own) found.set(of, (1 + count - lowerBound(largest, t - 1e-9)) / (count + 1))
  return found
}

/** Position on the axis of energised time, in cells; quick for times that ascend. */
type Axis = (t: number) => number

function energisedAxis(energised: Spans, scale: number): Axis {
  const before = new Float64Array(energised.length >>> 1)
  for (let i = 1; i < before.length; i++) before[i] = before[i - 1]! + energised[2 * i - 1]! - energised[2 * i - 2]!
  const last = before.length - 1
  let k = 0
  return (t) => {
    if (k > 0 && energised[2 * k - 1]! >= t) k = Math.min(last, lowerBound(energised, t) >>> 1)
    while (k < last && energised[2 * k + 1]! < t) k++
    return (before[k]! + Math.max(0, Math.min(t, energised[2 * k + 1]!) - energised[2 * k]!)) * scale
  }
}

interface Points {
  readonly cell: Uint32Array
  readonly weight: Float64Array
}

function tripPoints(
  energised: Spans,
  axis: Axis,
  trips: readonly { readonly from: number; readonly to: number }[],
  cells: number,
): Points {
  const cell: number[] = []
  const weight: number[] = []
  const add = (at: number, share: number): void => {
    cell.push(Math.max(0, Math.min(cells - 1, Math.floor(at))))
    weight.push(share)
  }
  const start = energised[0] ?? 0
  for (const { from, to } of trips) {
    if (to - from < 2) add(axis(Math.max(start, from - 1)), 1)
    else {
      const [a, b] = [axis(from), axis(to)]
      for (let k = 0; k < POINTS; k++) add(a + ((b - a) * (k + 0.5)) / POINTS, 1 / POINTS)
    }
  }
  return { cell: Uint32Array.from(cell), weight: Float64Array.from(weight) }
}

/** Marks the cells that the window touches and says how many they are. */
function fill(raster: Uint8Array, window: Spans, axis: Axis): number {
  raster.fill(0)
  let marked = 0
  let done = 0
  for (let i = 0; i < window.length; i += 2) {
    const from = Math.max(done, Math.floor(axis(window[i]!)))
    const to = Math.min(raster.length, Math.ceil(axis(window[i + 1]!)))
    if (to <= from) continue
    // a call for every short run costs more than the cells themselves
    if (to - from > SHORT) raster.fill(1, from, to)
    else for (let c = from; c < to; c++) raster[c] = 1
    marked += to - from
    done = to
  }
  return marked
}

function hits(raster: Uint8Array, { cell, weight }: Points, shift: number): number {
  const { length } = raster
  let sum = 0
  for (let i = 0; i < cell.length; i++) {
    let at = cell[i]! + shift
    if (at >= length) at -= length
    if (raster[at] === 1) sum += weight[i]!
  }
  return sum
}

/** ln of the likelihood ratio of k of n inside against the share; 0 when there are no more than the share. */
function likelihoodRatio(k: number, n: number, share: number): number {
  if (k <= n * share) return 0
  const inside = k * Math.log(k / (n * share))
  return k >= n ? inside : inside + (n - k) * Math.log((n - k) / (n * (1 - share)))
}
