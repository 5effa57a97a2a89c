import { describe, expect, it } from 'vitest'
import { findings } from '../../core/findings/findings.ts'
import { SCENARIOS } from '../../core/simulate/scenarios/scenarios.ts'
import { evidenceOf } from '../../core/simulate/simulated.ts'
import { type Score, scoreOf } from '../bench/score.ts'

/** Seeds that no tuning looks at; the bench begins at 1. */
const SEEDS = [901, 902]

/** Kinds whose data may not hold the answer: three trips, or a culprit that nobody named. */
const HARD = new Set(['three-trips', 'unmonitored', 'slow-logger-with-gaps'])

const scores = new Map<string, Score[]>()

describe('the line-up finds the hidden truth', () => {
  it.each(Object.keys(SCENARIOS))('%s', (kind) => {
    const found = SEEDS.map((seed) => {
      const simulated = SCENARIOS[kind]!(seed)
      return scoreOf(findings(evidenceOf(simulated)).suspects, simulated.truth)
    })
    scores.set(kind, found)
    const told = found.map(({ first, firstProbability, right }) => `${first} ${firstProbability} ${right}`).join(', ')
    const least = HARD.has(kind) ? 0 : 1
    expect(found.filter(({ right }) => right).length, told).toBeGreaterThanOrEqual(least)
  })

  it('is right in six sites of seven over all kinds, and falsely sure in at most one of twenty', () => {
    const all = [...scores.values()].flat()
    const share = (is: (score: Score) => boolean): number => all.filter(is).length / all.length
    expect(share(({ right }) => right)).toBeGreaterThanOrEqual(0.85)
    expect(share(({ falseStrong }) => falseStrong.length > 0)).toBeLessThanOrEqual(0.05)
  })
})
