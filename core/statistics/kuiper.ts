import { onCircle, requireCircle } from './mean-direction.ts'

export interface Kuiper {
  /** Largest excess of the empirical over the uniform distribution, plus the largest shortfall. */
  readonly v: number
  /** v (√n + 0.155 + 0.24/√n), whose distribution hardly depends on n. */
  readonly vStar: number
  /** Stephens' approximation, good from n = 8 on; 1 for a single event, whose v is always 1. */
  readonly p: number
}

/**
 * Kuiper's test: are events on a circle uniform? Unlike Rayleigh's it sees any shape, and it does not depend on where
 * the circle is cut.
 *
 * @throws {CoreError} too_few_values (none), not_finite, out_of_range (period)
 * @see Kuiper (1960), Indag. Math. 22, 38-47; Stephens (1970), J. R. Statist. Soc. B 32, 115-122
 */
export function kuiper(values: ArrayLike<number>, period: number): Kuiper {
  requireCircle('kuiper', values, period)
  const n = values.length
  const u = Float64Array.from(values, (v) => onCircle(v, period) / period).sort()
  let above = 0
  let below = 0
  u.forEach((x, i) => {
    above = Math.max(above, (i + 1) / n - x)
    below = Math.max(below, x - i / n)
  })
  const v = above + below
  const root = Math.sqrt(n)
  const vStar = v * (root + 0.155 + 0.24 / root)
  return { v, vStar, p: n === 1 ? 1 : tail(vStar) }
}

/** 2 Σ (4 j² v² − 1) e^(−2 j² v²); below 0.4 it is 1 to many digits while the series would be slow. */
function tail(v: number): number {
  if (v < 0.4) return 1
  let sum = 0
  for (let j = 1; j <= 100; j++) {
    const square = j * j * v * v
    const term = (4 * square - 1) * Math.exp(-2 * square)
    sum += term
    if (Math.abs(term) < 1e-18 * sum) break
  }
  return Math.min(1, Math.max(0, 2 * sum))
}
