import { type ExactPValues, exactPValues } from './exact-test.ts'

/** All that the exact conditional distribution of a 2 × 2 count says. */
export interface ConditionalOdds extends ExactPValues {
  /** Conditional maximum-likelihood odds ratio; null when the margins leave one table only. */
  readonly oddsRatio: number | null
  readonly low: number
  readonly high: number
}

const TIE = 1 + 1e-7

/**
 * Exact inference on an odds ratio ψ when P(A = least + k) is proportional to weight_k ψ^k, `logWeights` their logarithms:
 * Fisher's noncentral hypergeometric distribution of one table, or the convolution of several.
 *
 * @see Fisher (1935), J. R. Statist. Soc. 98, 39-54; Gart (1970), Biometrika 57, 471-475 (several tables)
 */
export function conditionalOdds(logWeights: Float64Array, at: number, confidence: number): ConditionalOdds {
  const last = logWeights.length - 1
  const chances = chancesAt(logWeights, 0)
  const pObserved = chances[at]!
  let less = 0
  let greater = 0
  let two = 0
  chances.forEach((p, k) => {
    if (k <= at) less += p
    if (k >= at) greater += p
    if (p <= pObserved * TIE) two += p
  })
  const p = exactPValues(Math.min(1, less), Math.min(1, greater), Math.min(1, two), pObserved)
  const side = (1 - confidence) / 2
  const upperTail = (t: number): number => chancesAt(logWeights, t).subarray(at).reduce(add, 0)
  const lowerTail = (t: number): number =>
    chancesAt(logWeights, t)
      .subarray(0, at + 1)
      .reduce(add, 0)
  const mean = (t: number): number => chancesAt(logWeights, t).reduce((sum, c, k) => sum + c * k, 0)
  let oddsRatio: number | null = null
  if (last > 0) {
    oddsRatio = at === 0 ? 0 : at === last ? Number.POSITIVE_INFINITY : Math.exp(rootOfRising((t) => mean(t) - at))
  }
  return {
    ...p,
    oddsRatio,
    low: at === 0 ? 0 : Math.exp(rootOfRising((t) => upperTail(t) - side)),
    high: at === last ? Number.POSITIVE_INFINITY : Math.exp(rootOfRising((t) => side - lowerTail(t))),
  }
}

/** Probabilities of each count at log odds ratio t; the largest term is taken out so that nothing overflows. */
function chancesAt(logWeights: Float64Array, t: number): Float64Array {
  const logs = logWeights.map((w, k) => w + t * k)
  const top = logs.reduce((a, b) => Math.max(a, b), Number.NEGATIVE_INFINITY)
  const terms = logs.map((v) => Math.exp(v - top))
  const total = terms.reduce(add, 0)
  return terms.map((v) => v / total)
}

/** Where a rising function of the log odds ratio crosses 0: widen, then halve to the last bit. */
function rootOfRising(f: (t: number) => number): number {
  let low = -1
  let high = 1
  while (f(low) > 0) low *= 2
  while (f(high) < 0) high *= 2
  for (let step = 0; step < 120 && high - low > 1e-15 * Math.max(1, Math.abs(low)); step++) {
    const middle = (low + high) / 2
    if (f(middle) < 0) low = middle
    else high = middle
  }
  return (low + high) / 2
}

function add(a: number, b: number): number {
  return a + b
}
