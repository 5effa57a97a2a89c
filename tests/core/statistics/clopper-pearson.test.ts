import { describe, expect, it } from 'vitest'
import { binomialTest, clopperPearson } from '../../../core/statistics/clopper-pearson.ts'
import { ruleOfThree } from '../../../core/statistics/rule-of-three.ts'
import { matchReference } from './reference.ts'

describe('clopperPearson', () => {
  matchReference('clopper-pearson.json', ({ events, trials, confidence, proportion0 }) => {
    const { proportion, low, high } = clopperPearson(events, trials, { confidence })
    if (proportion0 === undefined) return { proportion, lower: low, upper: high }
    const p = binomialTest(events, trials, proportion0)
    return { proportion, lower: low, upper: high, p_two_sided: p.pTwoSided, p_less: p.pLess, p_greater: p.pGreater }
  })

  matchReference('rule-of-three.json', ({ trials, events, confidence }) => ({
    two_sided_clopper_pearson_upper: clopperPearson(events, trials, { confidence }).high,
    exact_binomial_upper: clopperPearson(events, trials, { confidence: 2 * confidence - 1 }).high,
    poisson_upper: ruleOfThree(trials, { confidence }),
  }))

  it.each([
    [2, 1],
    [-1, 5],
    [0.5, 5],
  ])('refuses %s of %s', (events, trials) => {
    expect(() => clopperPearson(events, trials)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })

  it('ruleOfThree refuses no exposure', () => {
    expect(() => ruleOfThree(0)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})
