import { CoreError } from '../errors.ts'
import { requireRange, requireSameLength } from './checks.ts'
import { type Design, dot, requireDesign } from './design.ts'
import { columnReach, type Fit, fitOf, type Likelihood, maximise, squareZeros } from './maximise.ts'

export interface ConditionalLogit extends Fit {
  readonly logLikelihoodNull: number
  /** Twice the gain over no effect; chi-squared with as many degrees of freedom as columns. */
  readonly chi2: number
  /** Strata with both cases and others; the rest tells nothing. */
  readonly informativeStrata: number
}

/**
 * Conditional logistic regression with the exact conditional likelihood, for matched sets and case-crossover designs: in each stratum
 * (say the same hour of the same weekday in a month) the rows of events are compared with the other rows. No intercept. Coefficients
 * are log odds ratios (log rate ratios for time-stratified case-crossover).
 *
 * @throws {CoreError} too_few_values (no informative stratum), unequal_lengths, not_finite, out_of_range (cases not 0 or 1), singular,
 *   no_convergence (separated)
 * @see Breslow & Day (1980), Statistical Methods in Cancer Research I, chapter 7; Gail, Lubin & Rubinstein (1981), Biometrika 68, 703-707
 * @see Maclure (1991), Am. J. Epidemiol. 133, 144-153; Janes, Sheppard & Lumley (2005), Epidemiology 16, 717-726
 */
export function conditionalLogit(
  x: Design,
  cases: ArrayLike<number>,
  stratum: ArrayLike<number | string>,
): ConditionalLogit {
  const p = requireDesign('conditionalLogit', x, cases)
  requireSameLength('conditionalLogit', cases, stratum)
  const groups = new Map<number | string, number[]>()
  for (let i = 0; i < cases.length; i++) {
    requireRange('conditionalLogit', cases[i] === 0 || cases[i] === 1, 'cases of 0 or 1', cases[i])
    const group = groups.get(stratum[i]!)
    if (group) group.push(i)
    else groups.set(stratum[i]!, [i])
  }
  const informative = [...groups.values()].filter((rows) => {
    const count = rows.reduce((sum, i) => sum + cases[i]!, 0)
    return count > 0 && count < rows.length
  })
  if (informative.length === 0) {
    throw new CoreError(
      'too_few_values',
      `conditionalLogit found no stratum with both cases and others among ${groups.size}`,
    )
  }
  const at = (b: Float64Array): Likelihood => {
    const total = { value: 0, gradient: new Float64Array(p), information: squareZeros(p) }
    for (const rows of informative) addStratum(total, x, cases, rows, b)
    return total
  }
  const none = at(new Float64Array(p))
  const { b, likelihood } = maximise('conditionalLogit', at, new Float64Array(p), columnReach(x, p))
  return {
    ...fitOf(b, likelihood),
    logLikelihoodNull: none.value,
    chi2: Math.max(0, 2 * (likelihood.value - none.value)),
    informativeStrata: informative.length,
  }
}

/**
 * Adds one stratum: ln of e^(Σ η of its cases) over the sum of e^(Σ η) over all sets of as many rows. That sum and its first two
 * derivatives grow row by row: sets of m rows either leave the new row out or add it to a set of m − 1.
 */
function addStratum(
  total: { value: number; gradient: Float64Array; information: Float64Array[] },
  x: Design,
  cases: ArrayLike<number>,
  rows: readonly number[],
  b: Float64Array,
): void {
  const p = b.length
  const count = rows.reduce((sum, i) => sum + cases[i]!, 0)
  const etas = rows.map((i) => dot(x[i]!, b))
  const top = Math.max(...etas)
  const sets = new Float64Array(count + 1)
  sets[0] = 1
  const first = Array.from({ length: count + 1 }, () => new Float64Array(p))
  const second = Array.from({ length: count + 1 }, () => squareZeros(p))
  rows.forEach((row, r) => {
    const e = Math.exp(etas[r]! - top)
    const v = x[row]!
    for (let m = Math.min(count, r + 1); m >= 1; m--) {
      const [s, f] = [sets[m - 1]!, first[m - 1]!]
      for (let i = 0; i < p; i++) {
        for (let j = 0; j < p; j++) {
          second[m]![i]![j]! += e * (second[m - 1]![i]![j]! + v[i]! * f[j]! + f[i]! * v[j]! + v[i]! * v[j]! * s)
        }
      }
      for (let i = 0; i < p; i++) first[m]![i]! += e * (f[i]! + v[i]! * s)
      sets[m]! += e * s
    }
    if (cases[row] === 1) {
      total.value += etas[r]! - top
      for (let i = 0; i < p; i++) total.gradient[i]! += v[i]!
    }
  })
  const whole = sets[count]!
  total.value -= Math.log(whole)
  const mean = first[count]!.map((v) => v / whole)
  for (let i = 0; i < p; i++) {
    total.gradient[i]! -= mean[i]!
    for (let j = 0; j < p; j++) total.information[i]![j]! += second[count]![i]![j]! / whole - mean[i]! * mean[j]!
  }
}
