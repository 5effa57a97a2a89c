import { requireCount, requireFinite, requireRange } from './checks.ts'
import { medianSorted } from './median.ts'

/**
 * Medcouple, a robust measure of skewness from −1 to 1: above 0 when the upper half reaches farther. It widens the whiskers of a box
 * plot on the long side. At most 4,000 values (all pairs are taken).
 *
 * @throws {CoreError} too_few_values (none), not_finite, out_of_range
 * @see Brys, Hubert & Struyf (2004), J. Comput. Graph. Statist. 13, 996-1017
 */
export function medcouple(values: ArrayLike<number>): number {
  requireCount('medcouple', values.length, 1)
  requireFinite('medcouple', values)
  requireRange('medcouple', values.length <= 4000, 'at most 4000 values', values.length)
  const ascending = Float64Array.from(values).sort()
  const middle = medianSorted(ascending)
  const upper = ascending.filter((v) => v >= middle).reverse()
  const lower = ascending.filter((v) => v <= middle).reverse()
  // Values equal to the median: the last of `upper`, the first of `lower`.
  const ties = ascending.filter((v) => v === middle).length
  const kernel = new Float64Array(upper.length * lower.length)
  let next = 0
  upper.forEach((a, i) => {
    lower.forEach((b, j) => {
      kernel[next++] =
        a > b ? (a - middle - (middle - b)) / (a - b) : Math.sign(ties - 1 - (i - (upper.length - ties)) - j)
    })
  })
  return medianSorted(kernel.sort())
}
