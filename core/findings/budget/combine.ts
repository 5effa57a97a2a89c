import tQuantile from '@stdlib/stats-base-dists-t-quantile'
import type { BudgetLine } from '../../contract/findings.ts'

/** What one kind of evidence says of a thing, mA. */
export interface Source {
  readonly basis: Exclude<BudgetLine['basis'], 'unjudged'>
  readonly ma: number
  /** Standard error, above 0, and the degrees of freedom it rests on. */
  readonly error: number
  readonly freedom: number
}

/** All of it together. */
export interface Combined {
  readonly ma: number
  /** Half-width of the 90 % interval. */
  readonly half: number
  /** The kind with the greatest weight. */
  readonly basis: Source['basis']
  /** Whether the sources differ by more than their errors allow. */
  readonly disagree: boolean
}

/**
 * Weighted mean of what several kinds of evidence say, each by the inverse of its squared error. Where they differ by more than
 * their errors allow, the same variance is added to all until they agree, so that the interval says how far they are apart.
 * Degrees of freedom after Welch and Satterthwaite. Needs one source at least.
 *
 * @see Paule & Mandel (1982), J. Res. Natl. Bur. Stand. 87, 377-385
 */
export function combined(sources: readonly Source[]): Combined {
  const between = betweenVariance(sources)
  const weights = sources.map(({ error }) => 1 / (error * error + between))
  const total = weights.reduce((sum, w) => sum + w, 0)
  const ma = sources.reduce((sum, source, i) => sum + (weights[i]! / total) * source.ma, 0)
  const freedom = 1 / sources.reduce((sum, source, i) => sum + (weights[i]! / total) ** 2 / source.freedom, 0)
  const top = sources.reduce((best, _, i) => (weights[i]! > weights[best]! ? i : best), 0)
  const disagree = sources.length > 1 && disagreement(sources, 0) > CRITICAL[sources.length]!
  return { ma, half: tQuantile(0.95, freedom) / Math.sqrt(total), basis: sources[top]!.basis, disagree }
}

/** 95 % points of chi-squared with one degree of freedom less than there are sources. */
const CRITICAL: readonly number[] = [Number.POSITIVE_INFINITY, Number.POSITIVE_INFINITY, 3.841, 5.991]

/** Weighted squares about the weighted mean, with a variance added to all. */
function disagreement(sources: readonly Source[], between: number): number {
  const weights = sources.map(({ error }) => 1 / (error * error + between))
  const total = weights.reduce((sum, w) => sum + w, 0)
  const mean = sources.reduce((sum, source, i) => sum + (weights[i]! / total) * source.ma, 0)
  return sources.reduce((sum, source, i) => sum + weights[i]! * (source.ma - mean) ** 2, 0)
}

/** The variance at which the sources are as far apart as their errors say, by halving; 0 where they are nearer. */
function betweenVariance(sources: readonly Source[]): number {
  const wanted = sources.length - 1
  if (wanted === 0 || disagreement(sources, 0) <= wanted) return 0
  const values = sources.map(({ ma }) => ma)
  let low = 0
  let high = (Math.max(...values) - Math.min(...values)) ** 2
  for (let step = 0; step < 60; step++) {
    const middle = (low + high) / 2
    if (disagreement(sources, middle) > wanted) low = middle
    else high = middle
  }
  return high
}
