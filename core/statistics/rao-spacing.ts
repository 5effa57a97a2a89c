import { requireRange } from './checks.ts'
import { logGamma } from './log-gamma.ts'
import { onCircle, requireCircle } from './mean-direction.ts'

export interface RaoSpacing {
  /** Half the sum of |spacing − mean spacing|, as a share of the circle: 0 for even spacing, near 1 for one cluster. */
  readonly u: number
  /** Exact probability of a larger u for uniform events. */
  readonly p: number
}

/** Abscissae above 0 and weights of 16-point Gauss–Legendre quadrature (Abramowitz & Stegun, table 25.4). */
const NODES = [
  [0.09501250983763744, 0.1894506104550685],
  [0.2816035507792589, 0.18260341504492358],
  [0.45801677765722737, 0.16915651939500254],
  [0.6178762444026438, 0.14959598881657674],
  [0.755404408355003, 0.12462897125553388],
  [0.8656312023878318, 0.09515851168249279],
  [0.9445750230732326, 0.06225352393864789],
  [0.9894009349916499, 0.02715245941175409],
] as const

/**
 * Rao's spacing test of uniformity on the circle; it sees several clusters that cancel out in Rayleigh's test. Rounded times make
 * ties, and ties make it too bold: spread them over their rounding first. At most 1,000 events.
 *
 * @throws {CoreError} too_few_values (none), not_finite, out_of_range
 * @see Rao (1976), Sankhya B 38, 329-338; Sherman (1950), Ann. Math. Statist. 21, 339-361
 */
export function raoSpacing(values: ArrayLike<number>, period: number): RaoSpacing {
  requireCircle('raoSpacing', values, period)
  const n = values.length
  requireRange('raoSpacing', n <= 1000, 'at most 1000 events', n)
  const place = Float64Array.from(values, (v) => onCircle(v, period) / period).sort()
  let u = 0
  for (let i = 0; i < n; i++) {
    const spacing = i + 1 < n ? place[i + 1]! - place[i]! : 1 - place[n - 1]! + place[0]!
    u += Math.abs(spacing - 1 / n) / 2
  }
  return { u, p: upperTail(u, n) }
}

/** ∫ density from u to 1 − 1/n. Between multiples of 1/n the density is a polynomial, so each such piece is taken by itself. */
function upperTail(u: number, n: number): number {
  const most = 1 - 1 / n
  if (n === 1 || u <= 1e-12) return 1
  let total = 0
  let from = u
  while (from < most - 1e-12) {
    const to = Math.min(most, (Math.floor(from * n + 1e-9) + 1) / n)
    const half = (to - from) / 2
    let piece = 0
    for (const [node, weight] of NODES) {
      piece += weight * half * (density(from + half * (1 - node), n) + density(from + half * (1 + node), n))
    }
    total += piece
    // Beyond the peak at about 1/e the density only falls.
    if (from > 0.5 && piece < 1e-17 * total) break
    from = to
  }
  return Math.min(1, total)
}

/**
 * (n−1)! Σ_j C(n, j) u^(n−j−1) / (n−j−1)! g_j(nu) / n^(j−1), j the number of spacings above the mean and g_j the density of the
 * sum of j uniform numbers. All terms are positive; g_j comes from its recurrence, which is stable too:
 * g_j(x) = (x g_{j−1}(x) + (j − x) g_{j−1}(x − 1)) / (j − 1).
 */
function density(u: number, n: number): number {
  const x = n * u
  // at[i] holds g_j(x − i).
  const size = Math.floor(x) + 1
  const at = new Float64Array(size + 1)
  at[size - 1] = 1
  let sum = 0
  for (let j = 1; j < n; j++) {
    if (j > 1) for (let i = 0; i < size; i++) at[i] = ((x - i) * at[i]! + (j - x + i) * at[i + 1]!) / (j - 1)
    // Values whose argument lies beyond j are 0; the recurrence leaves rounding of either sign there.
    const g = x < j ? at[0]! : 0
    if (g <= 0) continue
    const logFactor =
      2 * logGamma(n) +
      Math.log(n) -
      logGamma(j + 1) -
      logGamma(n - j + 1) -
      logGamma(n - j) +
      (n - j - 1) * Math.log(u)
    sum += g * Math.exp(logFactor - (j - 1) * Math.log(n))
  }
  return sum
}
