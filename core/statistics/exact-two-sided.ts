/** A discrete distribution with one peak, seen as functions of the whole number k. */
export interface UnimodalCounts {
  readonly pmf: (k: number) => number
  /** P(K <= k) */
  readonly lower: (k: number) => number
  /** P(K >= k) */
  readonly upper: (k: number) => number
  /** A value at or next to the peak. */
  readonly mode: number
  readonly least: number
  /** Infinity when counts have no upper end. */
  readonly most: number
}

/** Probabilities within this relative distance count as equal, so that rounding does not break ties. */
const TIE = 1 + 1e-7

/**
 * Two-sided p-value of an exact test by the method of small p-values: the sum of P(K = k) over every k that is not more
 * probable than the observed one. One peak means that these k form two tails; the inner end of the far tail is found
 * by bisection, so the cost is O(log n) tail evaluations.
 *
 * @see Sterne (1954), Biometrika 41, 275-278; Agresti (1992), Statistical Science 7, 131-153
 */
export function exactTwoSided(observed: number, counts: UnimodalCounts): number {
  const bound = counts.pmf(observed) * TIE
  const mode = Math.min(counts.most, Math.max(counts.least, counts.mode))
  if (observed <= mode) {
    let step = 1
    let inside = mode
    let outside = mode
    while (outside <= counts.most && counts.pmf(outside) > bound) {
      inside = outside
      outside = Math.min(counts.most + 1, outside + step)
      step *= 2
    }
    while (outside - inside > 1) {
      const middle = Math.floor((inside + outside) / 2)
      if (counts.pmf(middle) > bound) inside = middle
      else outside = middle
    }
    if (outside <= observed) return 1
    return Math.min(1, counts.lower(observed) + (outside > counts.most ? 0 : counts.upper(outside)))
  }
  // Left of the peak the range is finite: bisect between the least count and the mode.
  if (counts.pmf(mode) <= bound) return 1
  let outside = counts.least - 1
  let inside = mode
  while (inside - outside > 1) {
    const middle = Math.floor((inside + outside) / 2)
    if (counts.pmf(middle) > bound) inside = middle
    else outside = middle
  }
  return Math.min(1, counts.upper(observed) + (outside < counts.least ? 0 : counts.lower(outside)))
}
