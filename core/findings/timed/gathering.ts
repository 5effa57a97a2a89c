import { poissonUpperTail } from '../../statistics/poisson-cdf.ts'

const CIRCLE = 1_440
/** Widths of the window that are tried, minutes: a time switch is exact, … */
export const EXACT: readonly number[] = [3, 6, 12]
/** … a photocell sees clouds. */
export const LOOSE: readonly number[] = [3, 6, 12, 24]
/** The window is compared with so many minutes on each side of it, so that a habit of people is no timer, … */
export const ROUND = 90
/** … and with so many of its own widths next to it, at least so many minutes: a habit may have a peak. */
const NEAR_WIDTHS = 1.5
const NEAR = 10
/** Fewer days than this show no schedule. */
export const LEAST_STARTS = 5

/** Windows tried on so many minutes of the circle: overlapping ones count as one and a half. */
export function windowsTried(widths: readonly number[], minutes: number = CIRCLE): number {
  return widths.reduce((sum, width) => sum + (1.5 * minutes) / width, 0)
}

/** Starts on a circle of 1,440 minutes, each on a day of its own number. */
export interface DayPlace {
  readonly minute: number
  readonly day: number
}

/** The window of the day that holds the starts of more days than its surroundings let expect. */
export interface Gathering {
  /** Middle of the starts inside, minutes in [0, 1440). */
  readonly minute: number
  /** Width of the window, minutes. */
  readonly width: number
  /** Days with a start inside. */
  readonly days: number
  /** Poisson tail of so many days under the density of the surroundings; not yet paid for. */
  readonly p: number
}

/**
 * Scan statistic on the circle with a local null: for windows of several widths the number of different days with a start
 * inside, against the Poisson tail under the density of starts in the 90 minutes on both sides, or next to it when that is greater. People's habits are
 * broad and raise both; a time switch is not. Null below five days. Linear in starts.
 *
 * @see Naus (1965), JASA 60, 532-538; Kulldorff (1997), Commun. Statist. Theory Meth. 26, 1481-1496
 */
export function gathering(places: readonly DayPlace[], widths: readonly number[]): Gathering | null {
  if (places.length < LEAST_STARTS) return null
  const sorted = [...places].sort((a, b) => a.minute - b.minute)
  const n = sorted.length
  // laid out three times, so that windows and surroundings may pass midnight
  const at = (i: number): number => sorted[i % n]!.minute + CIRCLE * (Math.floor(i / n) - 1)
  const firstDay = sorted.reduce((least, { day }) => Math.min(least, day), Number.POSITIVE_INFINITY)
  const days = sorted.reduce((most, { day }) => Math.max(most, day - firstDay + 1), 0)
  const dayOf = (i: number): number => sorted[i % n]!.day - firstDay
  let best = { first: 0, last: 0, width: 0, days: 0, expected: 1, excess: 0 }
  for (const width of widths) {
    const inside = new Int32Array(days)
    let filled = 0
    const near = Math.max(NEAR, NEAR_WIDTHS * width)
    const wide = new Sliding(at, 3 * n, ROUND, width + ROUND)
    const close = new Sliding(at, 3 * n, near, width + near)
    let last = n
    for (let first = n; first < 2 * n; first++) {
      while (last < 3 * n && at(last) < at(first) + width) {
        if (inside[dayOf(last)]!++ === 0) filled++
        last++
      }
      const here = last - first
      const expected = Math.max(
        ((wide.countRound(first) - here + 1) * width) / (2 * ROUND),
        ((close.countRound(first) - here) * width) / (2 * near),
      )
      // Chernoff's exponent of the Poisson tail ranks the windows; the tail itself is taken once
      const excess = filled > expected ? filled * Math.log(filled / expected) - (filled - expected) : 0
      if (filled >= LEAST_STARTS && excess > best.excess) {
        best = { first, last, width, days: filled, expected, excess }
      }
      if (--inside[dayOf(first)]! === 0) filled--
    }
  }
  if (best.excess === 0) return null
  const middle = at(Math.floor((best.first + best.last - 1) / 2))
  const other = at(Math.ceil((best.first + best.last - 1) / 2))
  return {
    minute: onCircle((middle + other) / 2),
    width: best.width,
    days: best.days,
    p: poissonUpperTail(best.days, best.expected),
  }
}

/** Counts places from `before` minutes before a place to `after` behind it, for places asked in order. */
class Sliding {
  private low = 0
  private high = 0
  private readonly at: (i: number) => number
  private readonly end: number
  private readonly before: number
  private readonly after: number

  constructor(at: (i: number) => number, end: number, before: number, after: number) {
    this.at = at
    this.end = end
    this.before = before
    this.after = after
  }

  countRound(i: number): number {
    const place = this.at(i)
    while (this.at(this.low) < place - this.before) this.low++
    while (this.high < this.end && this.at(this.high) < place + this.after) this.high++
    return this.high - this.low
  }
}

/** Minutes on a circle of a day, in [0, 1440). */
export function onCircle(minute: number): number {
  return ((minute % CIRCLE) + CIRCLE) % CIRCLE
}

/** Signed way from b to a round the circle of a day, in [−720, 720). */
export function wayRound(a: number, b: number): number {
  return onCircle(a - b + CIRCLE / 2) - CIRCLE / 2
}
