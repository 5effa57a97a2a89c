import { requireCount, requireFinite, requireRange, requireSameLength } from './checks.ts'

/**
 * Quantile of values that count with weights, here the time each reading stands for, so that a logger that speeds up near
 * events does not distort it. Zero weights are left out.
 *
 * With values ascending, C the weight before value k, w its own, W the total and w̄ = W / n the mean weight, value k sits at
 * probability (C + w/2 + w̄/6) / (W + w̄/3); between these points it is linear, beyond them constant. With equal weights that
 * is (k − 1/3) / (n + 1/3): it reduces to Hyndman & Fan's type 8, {@link quantile}. The form is symmetric (negating the values
 * mirrors it), does not change when all weights are scaled, and splitting a reading in two moves it by at most the order of w̄ / W.
 *
 * @throws {CoreError} too_few_values (no positive weight), not_finite, unequal_lengths, out_of_range (negative weight, p)
 * @see Hyndman & Fan (1996), The American Statistician 50, 361-365, for the unweighted form
 */
export function weightedQuantile(values: ArrayLike<number>, weights: ArrayLike<number>, p: number): number {
  return weightedQuantiles(values, weights, [p])[0]!
}

/** Several weighted quantiles with one sort; see {@link weightedQuantile}. */
export function weightedQuantiles(
  values: ArrayLike<number>,
  weights: ArrayLike<number>,
  ps: readonly number[],
): number[] {
  requireSameLength('weightedQuantile', values, weights)
  requireFinite('weightedQuantile', values)
  requireFinite('weightedQuantile', weights)
  const used: number[] = []
  let total = 0
  for (let i = 0; i < values.length; i++) {
    requireRange('weightedQuantile', weights[i]! >= 0, 'weights from 0', weights[i])
    if (weights[i]! > 0) used.push(i)
    total += weights[i]!
  }
  requireCount('weightedQuantile', used.length, 1)
  for (const p of ps) requireRange('weightedQuantile', p >= 0 && p <= 1, 'p from 0 to 1', p)
  const order = Uint32Array.from(used).sort((a, b) => values[a]! - values[b]! || a - b)

  const mean = total / order.length
  const positions = new Float64Array(order.length)
  let before = 0
  order.forEach((at, k) => {
    positions[k] = (before + weights[at]! / 2 + mean / 6) / (total + mean / 3)
    before += weights[at]!
  })
  return ps.map((p) => {
    const above = firstAtLeast(positions, p)
    if (above === 0) return values[order[0]!]!
    if (above === order.length) return values[order[above - 1]!]!
    const low = values[order[above - 1]!]!
    const high = values[order[above]!]!
    const share = (p - positions[above - 1]!) / (positions[above]! - positions[above - 1]!)
    return low === high ? low : (1 - share) * low + share * high
  })
}

/** Index of the first ascending value that is at least x; the length when there is none. */
function firstAtLeast(ascending: Float64Array, x: number): number {
  let low = 0
  let high = ascending.length
  while (low < high) {
    const middle = (low + high) >> 1
    if (ascending[middle]! < x) low = middle + 1
    else high = middle
  }
  return low
}
