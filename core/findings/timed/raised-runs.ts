import { changepointBiweight, quantile } from '../../statistics/index.ts'
import { type Series, usualInterval } from '../../timeline/series.ts'

const MINUTE_MS = 60_000
/** Points the segmentation may cost; longer logs are taken in means of several minutes. */
const MOST_POINTS = 180_000
/** Loads come back by and by after a restart: rises so soon after the beginning of a stretch begin no run. */
const RESTART_MS = 15 * MINUTE_MS
/** Readings farther apart than this many points are not compared. */
const GAP_POINTS = 3
/** Points on each side of a place over which the noise of a step is measured. */
const SIDE = 5
/** Makes the lower quartile of absolute values estimate the standard deviation of normal values: 1 / Φ⁻¹(5/8). */
const QUARTER_TO_SIGMA = 3.13838
/** A step below so many times that noise is none. */
const LEAST_NOISES = 4
/** No clamp tells less, mA. */
const LEAST_MA = 0.05
/** Changes the same way within so many points are one. */
const ONE_STEP_POINTS = 3
/** A fall belongs to a rise when their heights differ by less than this factor. */
const SAME_HEIGHT = 1.3
/** A rise that nothing ended for so long is a change of level, not a run. */
const LONGEST_MS = 26 * 3_600_000

/** A stretch in which the level stood higher: a rise and the fall that ended it. */
export interface RaisedRun {
  readonly from: number
  readonly to: number
  readonly ma: number
  /** The log or the supply ended before the run did: its length is a least one. */
  readonly cut: boolean
}

/** What the log shows of runs, how fine it is, and when it looked. */
export interface RaisedRuns {
  readonly runs: readonly RaisedRun[]
  /** Robust deviation of a step that is none, mA. */
  readonly noiseMa: number
  /** Length of a point, ms: a minute, or the logger's interval when that is longer. */
  readonly stepMs: number
  /** Stretches without a gap, [from, to) each. */
  readonly watched: readonly (readonly [number, number])[]
}

interface Change {
  readonly at: number
  readonly rise: number
  readonly before: number
  readonly after: number
}

interface Rise {
  readonly from: number
  readonly ma: number
  before: number
}

/**
 * Runs of a raised level in minute means: change points with the biweight loss (Fearnhead & Rigaill 2019), so that
 * a lone spike is none, rises paired with the falls of like height, else with the fall below half the height. The noise is
 * taken from the log: robust deviation of means of five points from the five before, which holds the slow wander too.
 * mA in, mA out. Linear in points.
 */
export function raisedRuns(remainder: Series): RaisedRuns {
  const width = Math.max(1, Math.ceil(remainder.t.length / MOST_POINTS))
  const usual = usualInterval(remainder)
  const stepMs = width * Math.max(MINUTE_MS, Number.isNaN(usual) ? 0 : usual)
  const points = width === 1 ? remainder : coarser(remainder, stepMs)
  const stretches = stretchesOf(points.t, GAP_POINTS * stepMs)
  const noiseMa = stepNoise(points.v, stretches)
  // the deviation of single points that would make this noise of a difference of two means
  const sigma = Math.max(noiseMa * Math.sqrt(SIDE / 2), LEAST_MA / LEAST_NOISES)
  const least = Math.max(LEAST_NOISES * noiseMa, LEAST_MA)
  const options = { penalty: 2 * sigma ** 2 * Math.log(Math.max(2, points.t.length)), k: 5 * sigma }
  const runs: RaisedRun[] = []
  for (const [a, b] of stretches) {
    if (b - a < 2 * SIDE) continue
    const settled = points.t[a]! + RESTART_MS
    const changes = changesOf(points.t, points.v, a, b, options).filter(
      ({ at, rise }) => Math.abs(rise) >= least && (rise < 0 || at >= settled),
    )
    runs.push(...paired(changes, points.t[b - 1]! + stepMs))
  }
  runs.sort((x, y) => x.from - y.from || x.to - y.to)
  const watched = stretches.map(([a, b]) => [points.t[a]!, points.t[b - 1]! + stepMs] as const)
  return { runs, noiseMa, stepMs, watched }
}

/** Means of several minutes; times are the beginnings. */
function coarser(series: Series, stepMs: number): Series {
  const t: number[] = []
  const v: number[] = []
  let sum = 0
  let n = 0
  for (let i = 0; i < series.t.length; i++) {
    const slot = Math.floor(series.t[i]! / stepMs)
    sum += series.v[i]!
    n++
    if (i + 1 < series.t.length && Math.floor(series.t[i + 1]! / stepMs) === slot) continue
    t.push(slot * stepMs)
    v.push(sum / n)
    sum = 0
    n = 0
  }
  return { t: Float64Array.from(t), v: Float64Array.from(v) }
}

function stretchesOf(t: Float64Array, gap: number): (readonly [number, number])[] {
  const out: (readonly [number, number])[] = []
  let begun = 0
  for (let i = 1; i <= t.length; i++) {
    if (i < t.length && t[i]! - t[i - 1]! <= gap) continue
    out.push([begun, i])
    begun = i
  }
  return out
}

/**
 * Robust deviation of the mean of five points less that of the five before, from the lower quartile of its size, so that
 * loads which step in every second comparison do not raise it; 0 when a quarter of the differences is exactly none.
 */
function stepNoise(v: Float64Array, stretches: readonly (readonly [number, number])[]): number {
  const found: number[] = []
  const stride = Math.max(1, Math.floor(v.length / 20_000))
  for (const [a, b] of stretches) {
    for (let i = a + SIDE; i + SIDE <= b; i += stride) {
      let difference = 0
      for (let k = 0; k < SIDE; k++) difference += v[i + k]! - v[i - 1 - k]!
      found.push(Math.abs(difference) / SIDE)
    }
  }
  return found.length === 0 ? 0 : QUARTER_TO_SIGMA * quantile(found, 0.25)
}

function changesOf(
  t: Float64Array,
  v: Float64Array,
  a: number,
  b: number,
  options: { readonly penalty: number; readonly k: number },
): Change[] {
  const { changepoints, values } = changepointBiweight(v.subarray(a, b), options)
  const out: Change[] = []
  for (let s = 0; s < changepoints.length; s++) {
    let last = s
    const rises = values[s + 1]! > values[s]!
    while (
      last + 1 < changepoints.length &&
      changepoints[last + 1]! - changepoints[last]! <= ONE_STEP_POINTS &&
      values[last + 2]! > values[last + 1]! === rises
    )
      last++
    const [before, after] = [values[s]!, values[last + 1]!]
    out.push({ at: t[a + changepoints[s]!]!, rise: after - before, before, after })
    s = last
  }
  return out
}

function paired(changes: readonly Change[], end: number): RaisedRun[] {
  const runs: RaisedRun[] = []
  let open: Rise[] = []
  for (const { at, rise, before, after } of changes) {
    open = open.filter(({ from }) => at - from <= LONGEST_MS)
    if (rise > 0) {
      open.push({ from: at, ma: rise, before })
      continue
    }
    const match = alike(open, -rise)
    if (match !== null) {
      runs.push({ from: match.from, to: at, ma: (match.ma - rise) / 2, cut: false })
      // what began while it ran stands on a level that is lower by it now
      for (const other of open) if (other.from > match.from) other.before -= match.ma
      open = open.filter((other) => other !== match)
      continue
    }
    const over = open.filter((one) => after < one.before + one.ma / 2)
    for (const one of over) runs.push({ from: one.from, to: at, ma: one.ma, cut: false })
    open = open.filter((one) => !over.includes(one))
  }
  for (const one of open)
    if (end - one.from <= LONGEST_MS) runs.push({ from: one.from, to: end, ma: one.ma, cut: true })
  return runs
}

/** The open rise whose height is nearest, within the factor that counts as the same; the later one of equals. */
function alike(open: readonly Rise[], ma: number): Rise | null {
  let best: Rise | null = null
  let least = Math.log(SAME_HEIGHT)
  for (const one of open) {
    const off = Math.abs(Math.log(one.ma / ma))
    if (off <= least) {
      least = off
      best = one
    }
  }
  return best
}

/** Median height and length of runs; the length of those that were seen to their end, when any was. */
export function sizeOf(runs: readonly RaisedRun[]): { readonly ma: number; readonly minutes: number } {
  const whole = runs.filter(({ cut }) => !cut)
  return {
    ma: quantile(
      runs.map(({ ma }) => ma),
      0.5,
    ),
    minutes: quantile(
      (whole.length > 0 ? whole : runs).map(({ from, to }) => (to - from) / MINUTE_MS),
      0.5,
    ),
  }
}
