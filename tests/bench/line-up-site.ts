// One simulated site scored: what the line-up bench's helpers do, each in a process of its own, so that all cores work.
import { findings } from '../../core/findings/findings.ts'
import { SCENARIOS } from '../../core/simulate/scenarios/scenarios.ts'
import { evidenceOf } from '../../core/simulate/simulated.ts'
import { type Score, scoreOf } from './score.ts'
import { mostOftenRunning, plainRateRatio } from './yardsticks.ts'

/** Which site: a kind of scenario and its seed. */
export interface SiteJob {
  readonly kind: string
  readonly seed: number
}

export interface SiteScore extends SiteJob {
  readonly score: Score
  /** Whether the two yardsticks name an answer that counts as right. */
  readonly often: boolean
  readonly ratio: boolean
  /** Of `findings`, ms. */
  readonly spent: number
}

export const AS_HELPER = '--score-sites'
/** What a helper says once it listens: a job sent before would be lost. */
export const READY = 'ready'

/** Simulates the site, asks for its findings and holds them against the truth. */
export function scoreSite({ kind, seed }: SiteJob): SiteScore {
  const simulated = SCENARIOS[kind]!(seed)
  const evidence = evidenceOf(simulated)
  const began = performance.now()
  const { suspects } = findings(evidence)
  const spent = performance.now() - began
  const { answers } = simulated.truth
  return {
    kind,
    seed,
    score: scoreOf(suspects, simulated.truth),
    often: answers.includes(mostOftenRunning(evidence) ?? 'nobody'),
    ratio: answers.includes(plainRateRatio(evidence) ?? 'nobody'),
    spent,
  }
}

if (process.argv.includes(AS_HELPER)) {
  process.on('message', (job: SiteJob) => {
    process.send?.(scoreSite(job))
  })
  process.send?.(READY)
}
