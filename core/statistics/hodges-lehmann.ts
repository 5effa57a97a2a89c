import { requireCount, requireFinite, requireRange } from './checks.ts'
import { medianSorted } from './median.ts'

/** All pairs are held in memory. */
const MOST_PAIRS = 4_500_000

/**
 * Hodges–Lehmann estimate of location: the median of (x_i + x_j)/2 over all i <= j. Nearly as sharp as the mean for normal
 * values, and 29 % of wild ones do not carry it off.
 *
 * @throws {CoreError} too_few_values (none), not_finite, out_of_range (over about 3,000 values)
 * @see Hodges & Lehmann (1963), Ann. Math. Statist. 34, 598-611
 */
export function hodgesLehmann(x: ArrayLike<number>): number {
  requireCount('hodgesLehmann', x.length, 1)
  requireFinite('hodgesLehmann', x)
  const n = x.length
  requireRange('hodgesLehmann', (n * (n + 1)) / 2 <= MOST_PAIRS, `at most ${MOST_PAIRS} pairs`, (n * (n + 1)) / 2)
  const averages = new Float64Array((n * (n + 1)) / 2)
  let next = 0
  for (let i = 0; i < n; i++) for (let j = i; j < n; j++) averages[next++] = x[i]! / 2 + x[j]! / 2
  return medianSorted(averages.sort())
}

/** Hodges–Lehmann estimate of the shift from y to x: the median of all differences x_i − y_j. */
export function hodgesLehmannShift(x: ArrayLike<number>, y: ArrayLike<number>): number {
  requireCount('hodgesLehmannShift', Math.min(x.length, y.length), 1)
  requireFinite('hodgesLehmannShift', x)
  requireFinite('hodgesLehmannShift', y)
  requireRange(
    'hodgesLehmannShift',
    x.length * y.length <= MOST_PAIRS,
    `at most ${MOST_PAIRS} pairs`,
    x.length * y.length,
  )
  const differences = new Float64Array(x.length * y.length)
  let next = 0
  for (let i = 0; i < x.length; i++) for (let j = 0; j < y.length; j++) differences[next++] = x[i]! - y[j]!
  return medianSorted(differences.sort())
}
