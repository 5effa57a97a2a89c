import { orderOfPValues } from './p-values.ts'

/**
 * Benjamini–Hochberg adjusted p-values, in the order given: the running minimum, from the largest p down, of
 * (m / i) p(i), cut at 1. Rejecting where the adjusted value is at most q keeps the expected share of false rejections at q
 * for independent or positively dependent tests.
 *
 * @throws {CoreError} out_of_range (a p-value outside [0, 1])
 * @see Benjamini & Hochberg (1995), J. R. Statist. Soc. B 57, 289-300
 */
export function benjaminiHochberg(p: ArrayLike<number>): number[] {
  const order = orderOfPValues('benjaminiHochberg', p)
  const adjusted = new Array<number>(p.length)
  let lowest = 1
  for (let i = p.length; i >= 1; i--) {
    const at = order[i - 1]!
    lowest = Math.min(lowest, (p.length / i) * p[at]!)
    adjusted[at] = lowest
  }
  return adjusted
}
