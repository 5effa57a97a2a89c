import type { Suspect } from '../../core/contract/findings.ts'
import type { Truth } from '../../core/simulate/simulated.ts'
import type { Measure } from './harness.ts'

/** How the line-up of one site did against its truth. */
export interface Score {
  readonly right: boolean
  readonly first: string
  readonly firstProbability: number
  /** Greatest probability given to any of the answers that count as right. */
  readonly toTruth: number
  /** Suspects graded strong that are no cause. */
  readonly falseStrong: readonly string[]
  /**
   * Every suspect's probability beside whether it is a cause. Where several answers say the same thing (a time switch on no sheet: the
   * clock, or an unlisted load), only the likeliest of them counts.
   */
  readonly told: readonly (readonly [probability: number, cause: boolean])[]
}

/** Scores a line-up, sorted by probability as it comes. */
export function scoreOf(suspects: readonly Suspect[], truth: Truth): Score {
  const right = new Set([...truth.answers, ...truth.causes])
  const first = suspects[0]
  const same = !truth.answers.every((of) => truth.causes.includes(of))
  const likeliest = suspects.find(({ of }) => right.has(of))?.of
  const counted = suspects.filter(({ of }) => !same || !right.has(of) || of === likeliest)
  return {
    right: first !== undefined && right.has(first.of),
    first: first?.of ?? '(nobody)',
    firstProbability: first?.probability ?? 0,
    toTruth: Math.max(0, ...suspects.filter(({ of }) => right.has(of)).map(({ probability }) => probability)),
    falseStrong: suspects.filter(({ of, grade }) => grade === 'strong' && !right.has(of)).map(({ of }) => of),
    told: counted.map(({ of, probability }) => [probability, right.has(of)] as const),
  }
}

/** Figures over several sites. */
export interface Summary {
  /** %. */
  readonly right: number
  readonly toTruth: number
  /** % of sites. */
  readonly falseStrong: number
  /** Brier (1950): mean squared distance of probability and outcome over all suspects of all sites. */
  readonly brier: number
  /** Of all suspects given about this probability, how many are causes. */
  readonly reliability: readonly Measure[]
}

export function summaryOf(scores: readonly Score[]): Summary {
  const n = Math.max(1, scores.length)
  const told = scores.flatMap((score) => score.told)
  const mean = (values: readonly number[]): number => values.reduce((a, b) => a + b, 0) / Math.max(1, values.length)
  // Deciles, the last of them open at neither end.
  const bins = Array.from({ length: 10 }, (_, k) => [k / 10, k === 9 ? 1.001 : (k + 1) / 10] as const)
  return {
    right: (100 * scores.filter((score) => score.right).length) / n,
    toTruth: mean(scores.map((score) => score.toTruth)),
    falseStrong: (100 * scores.filter((score) => score.falseStrong.length > 0).length) / n,
    brier: mean(told.map(([p, cause]) => (p - (cause ? 1 : 0)) ** 2)),
    reliability: bins.flatMap(([low, high]) => {
      const inside = told.filter(([p]) => p >= low && p < high)
      if (inside.length === 0) return []
      const said = 100 * mean(inside.map(([p]) => p))
      return [
        {
          what: `of ${inside.length} suspects given ${low} to ${Math.min(1, high)} (mean ${said.toFixed(1)} %), causes`,
          value: (100 * inside.filter(([, cause]) => cause).length) / inside.length,
          unit: '%',
          target: `${said.toFixed(0)} %`,
        },
      ]
    }),
  }
}
