import { seededRandom } from '../../statistics/random.ts'
import type { Hourly } from './hourly.ts'

const FOLDS = 5
const LONGEST_LAG = 24
/** Hours of level beside a driver that a response needs. */
const LEAST_HOURS = 72
/** Rotations of the level against the driver that p rests on. */
const ROTATIONS = 99
/** Rise of −2 ln likelihood that bounds a 90 % interval: χ² with one degree of freedom. */
const NINETY = 2.706
/** Stretches that the rotations work on; finer ones are thinned out. */
const MOST_ROTATED = 1_000
/** Of many laws each so-manieth is rotated: neighbours are much alike. */
const LAWS_ROTATED = 4

/** One law by which a driver may act: its values under some decay, as the level would feel them at once. */
export interface Law {
  /** Half-life of what still stands, h; null for a driver that acts as it is. */
  readonly halfLife: number | null
  readonly driver: Hourly
  /** What the driver becomes for the amount that is spoken of, say 10 mm standing or 5 °C more. */
  readonly amount: number
}

/** How the level follows a driver. */
export interface LevelResponse {
  readonly halfLife: number | null
  /** Hours by which the level follows, with a 90 % interval. */
  readonly lag: number
  readonly lagLow: number
  readonly lagHigh: number
  /** Level for the amount of the driver that is spoken of. */
  readonly rise: number
  readonly correlation: number
  /** Share of the level's scatter in hours held out that the law foretells; 0 or less: nothing. */
  readonly heldOut: number
  /** Share of rotations of the level against the driver that foretell as much; all laws and lags paid for. */
  readonly p: number
  readonly hours: number
}

/**
 * Does the level follow a driver, after how many hours, under which decay: the law and lag whose straight line, fitted on four fifths of
 * the time, foretells the fifth held out best (Stone 1974), with an interval of the lag by profile likelihood, hours that
 * resemble their neighbours counted as fewer. p by rotating the level against the driver (Chung & Fraser 1958), which keeps both
 * series' own rhythm. Null with too few hours or without change.
 */
export function levelResponse(level: Hourly, laws: readonly Law[]): LevelResponse | null {
  const lags = Array.from({ length: Math.floor(LONGEST_LAG / level.step) + 1 }, (_, k) => k)
  let best: { law: Law; lag: number; fit: Fit } | null = null
  const byLag = new Float64Array(lags.length).fill(Number.POSITIVE_INFINITY)
  for (const law of laws) {
    for (const lag of lags) {
      const fit = fitted(law.driver.v, level.v, lag)
      if (fit === null) continue
      byLag[lag] = Math.min(byLag[lag]!, fit.missed)
      if (best === null || fit.missed < best.fit.missed) best = { law, lag, fit }
    }
  }
  if (best === null || best.fit.n * level.step < LEAST_HOURS) return null
  const { law, lag, fit } = best
  const count = fit.n * resemblanceOf(law.driver.v, level.v, lag, fit)
  const isNear = (k: number): boolean => count * Math.log(byLag[k]! / fit.missed) <= NINETY
  let [low, high] = [lag, lag]
  while (low > 0 && isNear(low - 1)) low--
  while (high + 1 < lags.length && isNear(high + 1)) high++
  return {
    halfLife: law.halfLife,
    lag: lag * level.step,
    lagLow: low * level.step,
    lagHigh: high * level.step,
    rise: fit.slope * law.amount,
    correlation: fit.correlation,
    heldOut: 1 - fit.missed / fit.total,
    p: rotated(level, laws),
    hours: fit.n * level.step,
  }
}

interface Fit {
  readonly n: number
  readonly slope: number
  readonly intercept: number
  readonly correlation: number
  /** Squares missed in the fifths held out, and the squares about the means of the rest. */
  readonly missed: number
  readonly total: number
}

/** Straight line of y[i + lag] on x[i], each fifth of the span foretold from the other four. */
function fitted(x: Float64Array, y: Float64Array, lag: number): Fit | null {
  const n = x.length - lag
  if (n < FOLDS * 4) return null
  // per fold: count, Σx, Σy, Σxx, Σxy, Σyy
  const folds = Array.from({ length: FOLDS }, () => new Float64Array(6))
  const all = new Float64Array(6)
  for (let i = 0; i < n; i++) {
    const [a, b] = [x[i]!, y[i + lag]!]
    if (!(Number.isFinite(a) && Number.isFinite(b))) continue
    const fold = folds[Math.min(FOLDS - 1, Math.floor((i * FOLDS) / n))]!
    fold[0]!++
    fold[1]! += a
    fold[2]! += b
    fold[3]! += a * a
    fold[4]! += a * b
    fold[5]! += b * b
  }
  for (const fold of folds)
    fold.forEach((sum, k) => {
      all[k]! += sum
    })
  const line = lineOf(all)
  if (line === null) return null
  let [missed, total] = [0, 0]
  for (const fold of folds) {
    const rest = lineOf(all.map((sum, k) => sum - fold[k]!))
    if (rest === null) return null
    const { slope: s, intercept: c, mean } = rest
    const [k, sx, sy, sxx, sxy, syy] = [...fold] as [number, number, number, number, number, number]
    missed += syy + s * s * sxx + k * c * c - 2 * s * sxy - 2 * c * sy + 2 * s * c * sx
    total += syy - 2 * mean * sy + k * mean * mean
  }
  return missed > 0 && total > 0 ? { n: all[0]!, ...line, missed, total } : null
}

function lineOf(
  sums: Float64Array,
): { readonly slope: number; readonly intercept: number; readonly mean: number; readonly correlation: number } | null {
  const [n, sx, sy, sxx, sxy, syy] = [...sums] as [number, number, number, number, number, number]
  if (n < 8) return null
  const [xx, xy, yy] = [sxx - (sx * sx) / n, sxy - (sx * sy) / n, syy - (sy * sy) / n]
  if (xx <= 1e-9 * Math.abs(sxx) || yy <= 1e-12 * Math.abs(syy)) return null
  const slope = xy / xx
  return { slope, intercept: (sy - slope * sx) / n, mean: sy / n, correlation: xy / Math.sqrt(xx * yy) }
}

/** How many independent hours one hour counts for: (1 − r) / (1 + r), r the residuals' likeness to their neighbours. */
function resemblanceOf(x: Float64Array, y: Float64Array, lag: number, { slope, intercept }: Fit): number {
  let [own, next, before] = [0, 0, Number.NaN]
  for (let i = 0; i + lag < y.length; i++) {
    const r = y[i + lag]! - intercept - slope * x[i]!
    if (Number.isFinite(r)) own += r * r
    if (Number.isFinite(r * before)) next += r * before
    before = r
  }
  const r = Math.max(0, Math.min(0.99, own > 0 ? next / own : 0))
  return (1 - r) / (1 + r)
}

/** Share of rotations whose largest correlation over laws and a few lags is at least the unrotated one's. */
function rotated(level: Hourly, laws: readonly Law[]): number {
  const n = level.v.length
  const day = Math.max(1, Math.round(24 / level.step))
  const lags = [0, 1, 2, 4, 6, 9, 12, 18, 24]
    .map((h) => Math.round(h / level.step))
    .filter((k, i, a) => a.indexOf(k) === i)
  const stride = Math.max(1, Math.ceil(n / MOST_ROTATED))
  const every = Math.ceil(laws.length / LAWS_ROTATED)
  const tried = laws.filter((_, i) => i % every === every - 1)
  const greatest = (shift: number): number => {
    let most = 0
    for (const { driver } of tried)
      for (const lag of lags) most = Math.max(most, Math.abs(correlation(driver.v, level.v, lag - shift, stride)))
    return most
  }
  const seen = greatest(0)
  const random = seededRandom(`rotations of ${n} ${seen.toFixed(9)}`)
  const room = n - 2 * day
  if (room < day) return 1
  let asMuch = 1
  for (let k = 0; k < ROTATIONS; k++) {
    const shift = day + Math.floor(random.uniform() * room)
    if (greatest(shift) >= seen - 1e-12) asMuch++
  }
  return asMuch / (ROTATIONS + 1)
}

/** Correlation of x[i] with y[i + lag], turned round the end, over the pairs that are known. */
function correlation(x: Float64Array, y: Float64Array, lag: number, stride: number): number {
  const n = x.length
  const start = ((lag % n) + n) % n
  let [count, sx, sy, sxx, sxy, syy] = [0, 0, 0, 0, 0, 0]
  for (let i = 0; i < n; i += stride) {
    const k = i + start
    const [a, b] = [x[i]!, y[k < n ? k : k - n]!]
    if (!(Number.isFinite(a) && Number.isFinite(b))) continue
    count++
    sx += a
    sy += b
    sxx += a * a
    sxy += a * b
    syy += b * b
  }
  const [xx, xy, yy] = [sxx - (sx * sx) / count, sxy - (sx * sy) / count, syy - (sy * sy) / count]
  return xx > 1e-12 * sxx && yy > 1e-12 * syy ? xy / Math.sqrt(xx * yy) : 0
}
