// Does the line-up find the truth? Kinds of simulated sites × seeds, scored; two yardsticks that everybody could compute beside it.
// LINE_UP_SEEDS (10), LINE_UP_FIRST (first seed, 1) and LINE_UP_KINDS (all; comma-separated) choose what is run.
import { fileURLToPath } from 'node:url'
import { findings } from '../../core/findings/findings.ts'
import { SCENARIOS } from '../../core/simulate/scenarios/scenarios.ts'
import { evidenceOf } from '../../core/simulate/simulated.ts'
import type { Measure } from './harness.ts'
import { type Score, scoreOf, summaryOf } from './score.ts'
import { mostOftenRunning, plainRateRatio } from './yardsticks.ts'

export const name = 'line-up: simulated sites with hidden truth'

/** Runs all; prints a line for each kind, answers with the figures over all kinds. */
export async function run(): Promise<Measure[]> {
  const seeds = Number(process.env.LINE_UP_SEEDS ?? 10)
  const firstSeed = Number(process.env.LINE_UP_FIRST ?? 1)
  const wanted = process.env.LINE_UP_KINDS?.split(',')
  const kinds = Object.keys(SCENARIOS).filter((kind) => wanted === undefined || wanted.includes(kind))
  const all: Score[] = []
  const often: number[] = []
  const ratio: number[] = []
  let spent = 0
  console.log(HEAD)
  for (const kind of kinds) {
    const scores: Score[] = []
    const hits = { often: 0, ratio: 0 }
    const missed: string[] = []
    for (let seed = firstSeed; seed < firstSeed + seeds; seed++) {
      const simulated = SCENARIOS[kind]!(seed)
      const evidence = evidenceOf(simulated)
      const began = performance.now()
      const { suspects } = findings(evidence)
      spent += performance.now() - began
      const score = scoreOf(suspects, simulated.truth)
      scores.push(score)
      if (!score.right) missed.push(`${seed}: ${score.first} ${score.firstProbability.toFixed(2)}`)
      if (simulated.truth.answers.includes(mostOftenRunning(evidence) ?? 'nobody')) hits.often++
      if (simulated.truth.answers.includes(plainRateRatio(evidence) ?? 'nobody')) hits.ratio++
    }
    all.push(...scores)
    often.push(hits.often)
    ratio.push(hits.ratio)
    console.log(row(kind, scores, hits.often, hits.ratio, missed))
  }
  const sum = summaryOf(all)
  const share = (hits: readonly number[]): number => (100 * hits.reduce((a, b) => a + b, 0)) / Math.max(1, all.length)
  return [
    { what: 'first suspect right', value: sum.right, unit: '%' },
    { what: 'mean probability given to the truth', value: sum.toTruth, unit: '' },
    { what: 'sites with a false strong suspect', value: sum.falseStrong, unit: '%' },
    { what: 'Brier score over all suspects', value: sum.brier, unit: '' },
    ...sum.reliability,
    { what: 'yardstick: load most often running at trips is right', value: share(often), unit: '%' },
    { what: 'yardstick: greatest plain rate ratio is right', value: share(ratio), unit: '%' },
    { what: 'findings, mean time a site', value: spent / Math.max(1, all.length), unit: 'ms' },
  ]
}

const HEAD = `${'kind'.padEnd(22)} right  P(truth)  false strong  Brier   often  ratio   missed (seed: first suspect)`

function row(kind: string, scores: readonly Score[], often: number, ratio: number, missed: readonly string[]): string {
  const { right, toTruth, falseStrong, brier } = summaryOf(scores)
  const percent = (value: number): string => `${Math.round(value)}%`
  return [
    kind.padEnd(22),
    percent(right).padStart(5),
    toTruth.toFixed(2).padStart(9),
    percent(falseStrong).padStart(13),
    brier.toFixed(3).padStart(7),
    percent((100 * often) / scores.length).padStart(6),
    percent((100 * ratio) / scores.length).padStart(6),
    `  ${missed.slice(0, 5).join('; ')}`,
  ].join(' ')
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  for (const { what, value, unit } of await run()) console.log(`${what}: ${value.toFixed(3)} ${unit}`)
}
