import { orderOfPValues } from './p-values.ts'

/**
 * Holm's adjusted p-values, in the order given: the running maximum of (m − i + 1) p(i), cut at 1. Rejecting where the
 * adjusted value is at most α keeps the chance of any false rejection at α, under any dependence.
 *
 * @throws {CoreError} out_of_range (a p-value outside [0, 1])
 * @see Holm (1979), Scandinavian Journal of Statistics 6, 65-70
 */
export function holm(p: ArrayLike<number>): number[] {
  const order = orderOfPValues('holm', p)
  const adjusted = new Array<number>(p.length)
  let highest = 0
  order.forEach((at, i) => {
    highest = Math.max(highest, Math.min(1, (p.length - i) * p[at]!))
    adjusted[at] = highest
  })
  return adjusted
}
