import { binomialUpperTail } from '../../statistics/binomial.ts'
import { seededRandom } from '../../statistics/random.ts'

/** Widths of the window that are tried, shares of the circle: 10, 20, 40, 80 and 160 minutes of a day under supply. */
const WIDTHS = [1 / 144, 1 / 72, 1 / 36, 1 / 18, 1 / 9] as const
/** Throws for few and for many events; with many, the smallest p asked for is larger. */
const THROWS_FEW = 1_999
const THROWS_MANY = 499
const MANY = 60

/** The window of a circle that holds more events than chance would bring. */
export interface CircleScan {
  readonly width: number
  readonly within: number
  /** Places of the first and the last event inside; `until` is before `from` when the window passes the cut. */
  readonly from: number
  readonly until: number
  readonly expected: number
  /** Chance of any window of any width standing out as much, by simulation. */
  readonly p: number
}

/** The largest number of events in any arc of the given width; places in [0, 1), any order. */
export function fullestArc(places: ArrayLike<number>, width: number): number {
  return fullest(Float64Array.from(places).sort(), width).within
}

/**
 * Scan statistic on the circle: the window, of several widths, whose likelihood ratio against an even spread is largest; p from as
 * many even throws (seeded by the number of events, on which alone the null depends), which pays for all windows and widths.
 *
 * @see Naus (1965), JASA 60, 532-538; Kulldorff (1997), Commun. Statist. Theory Meth. 26, 1481-1496 (likelihood ratio)
 */
export function circleScan(places: ArrayLike<number>): CircleScan {
  const sorted = Float64Array.from(places).sort()
  const n = sorted.length
  const seen = best(sorted)
  const null_ = thrown(n)
  let asMuch = 1
  for (const ratio of null_) if (ratio >= seen.ratio - 1e-12) asMuch++
  return {
    width: seen.width,
    within: seen.within,
    from: sorted[seen.first % n] ?? 0,
    until: sorted[(seen.first + Math.max(1, seen.within) - 1) % n] ?? 0,
    expected: n * seen.width,
    p: Math.min(asMuch / (null_.length + 1), unionBound(seen.ratio, n)),
  }
}

/**
 * What the chance cannot exceed, however few the throws: for each width the number of windows that begin at an event times the binomial
 * tail of as many others inside as make the ratio (Boole's inequality).
 */
function unionBound(ratio: number, n: number): number {
  let bound = 0
  for (const width of WIDTHS) {
    let least = Math.ceil(n * width)
    while (least <= n && likelihoodRatio(least, n, width) < ratio - 1e-12) least++
    if (least <= n) bound += n * binomialUpperTail(least - 1, n - 1, width, 1 - width)
  }
  return Math.min(1, bound)
}

interface Best {
  readonly ratio: number
  readonly width: number
  readonly within: number
  readonly first: number
}

function best(sorted: Float64Array): Best {
  let found: Best = { ratio: 0, width: WIDTHS[0], within: 0, first: 0 }
  for (const width of WIDTHS) {
    const { within, first } = fullest(sorted, width)
    const ratio = likelihoodRatio(within, sorted.length, width)
    if (ratio > found.ratio) found = { ratio, width, within, first }
  }
  return found
}

function fullest(sorted: Float64Array, width: number): { readonly within: number; readonly first: number } {
  const n = sorted.length
  let found = { within: 0, first: 0 }
  let end = 0
  for (let first = 0; first < n; first++) {
    if (end < first) end = first
    while (end < first + n && (end < n ? sorted[end]! : sorted[end - n]! + 1) - sorted[first]! <= width) end++
    if (end - first > found.within) found = { within: end - first, first }
  }
  return found
}

/** Logarithm of how much likelier a higher rate in the window makes the counts; 0 when the window holds no more than its share. */
function likelihoodRatio(within: number, n: number, width: number): number {
  if (within <= n * width) return 0
  const rest = n - within
  return within * Math.log(within / (n * width)) + (rest > 0 ? rest * Math.log(rest / (n * (1 - width))) : 0)
}

const known = new Map<number, Float64Array>()

/** Likelihood ratios of even throws of n events. They depend on n alone, so they are made once. */
function thrown(n: number): Float64Array {
  let ratios = known.get(n)
  if (ratios === undefined) {
    const random = seededRandom(`scan of ${n}`)
    const places = new Float64Array(n)
    ratios = new Float64Array(n > MANY ? THROWS_MANY : THROWS_FEW)
    for (let s = 0; s < ratios.length; s++) {
      for (let i = 0; i < n; i++) places[i] = random.uniform()
      places.sort()
      ratios[s] = best(places).ratio
    }
    if (known.size > 64) known.clear()
    known.set(n, ratios)
  }
  return ratios
}
