import { describe, expect, it } from 'vitest'
import { conditionalLogit } from '../../../core/statistics/conditional-logit.ts'
import { firthLogistic } from '../../../core/statistics/firth-logistic.ts'
import { logisticRegression } from '../../../core/statistics/logistic-regression.ts'
import { poissonRegression } from '../../../core/statistics/poisson-regression.ts'
import { matchReference, referenceCases } from './reference.ts'

function refuses(
  file: string,
  name: string,
  call: (input: ReturnType<typeof referenceCases>[number]['input']) => unknown,
): void {
  it(`says no_convergence where no maximum exists: ${name}`, () => {
    const found = referenceCases(file).find((c) => c.name === name)!
    expect(() => call(found.input)).toThrow(expect.objectContaining({ code: 'no_convergence' }))
  })
}

describe('logisticRegression', () => {
  const except = ['completely separated', 'all events, intercept only']
  matchReference(
    'logistic-regression.json',
    ({ x, y, trials, offset }) => {
      const f = logisticRegression(x, y, { ...(trials && { trials }), ...(offset && { offset }) })
      return {
        coefficients: f.coefficients,
        standard_errors: f.standardErrors,
        covariance: f.covariance,
        log_likelihood: f.logLikelihood,
        deviance: f.deviance,
      }
    },
    { except },
  )
  for (const name of except) refuses('logistic-regression.json', name, ({ x, y }) => logisticRegression(x, y))

  it('follows the unit of a column and the sense of the event', () => {
    const x = [
      [1, 1],
      [1, 2],
      [1, 3],
      [1, 4],
      [1, 5],
      [1, 6],
    ]
    const y = [0, 1, 0, 1, 0, 1]
    const plain = logisticRegression(x, y)
    const scaled = logisticRegression(
      x.map((r) => [1, r[1]! * 1e4]),
      y.map((v) => 1 - v),
    )
    expect(scaled.coefficients[1]! * 1e4).toBeCloseTo(-plain.coefficients[1]!, 8)
  })

  it('throws singular for dependent columns and out_of_range for impossible counts', () => {
    expect(() =>
      logisticRegression(
        [
          [1, 1],
          [1, 1],
          [1, 1],
        ],
        [0, 1, 0],
      ),
    ).toThrow(expect.objectContaining({ code: 'singular' }))
    expect(() => logisticRegression([[1], [1]], [2, 0])).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})

describe('poissonRegression', () => {
  matchReference(
    'poisson-regression.json',
    ({ x, y, offset }) => {
      const f = poissonRegression(x, y, offset ? { offset } : {})
      return {
        coefficients: f.coefficients,
        standard_errors: f.standardErrors,
        covariance: f.covariance,
        log_likelihood: f.logLikelihood,
        deviance: f.deviance,
        pearson_chi2: f.pearsonChi2,
        df_residual: f.degreesOfFreedom,
      }
    },
    { except: ['no event at all'] },
  )
  refuses('poisson-regression.json', 'no event at all', ({ x, y, offset }) => poissonRegression(x, y, { offset }))

  it('gives the plain rate ratio for two groups', () => {
    const f = poissonRegression(
      [
        [1, 0],
        [1, 1],
      ],
      [4, 9],
      { offset: [Math.log(100), Math.log(50)] },
    )
    expect(Math.exp(f.coefficients[1]!)).toBeCloseTo(9 / 50 / (4 / 100), 8)
    expect(f.standardErrors[1]).toBeCloseTo(Math.sqrt(1 / 4 + 1 / 9), 8)
  })
})

describe('firthLogistic', () => {
  matchReference('firth-logistic.json', ({ x, y }) => {
    const f = firthLogistic(x, y)
    return {
      coefficients: f.coefficients,
      standard_errors: f.standardErrors,
      covariance: f.covariance,
      penalised_log_likelihood: f.penalisedLogLikelihood,
      log_likelihood: f.logLikelihood,
      penalised_lr_chi2: f.chi2,
      penalised_lr_p: f.p,
      profile_lower: f.low,
      profile_upper: f.high,
    }
  })

  it('throws for events that are none', () => {
    expect(() => firthLogistic([[1], [1]], [0, 2])).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})

describe('conditionalLogit', () => {
  const separated = 'separated: every case has the larger x'
  matchReference(
    'conditional-logit.json',
    ({ x, case: cases, stratum }) => {
      const f = conditionalLogit(x, cases, stratum)
      return {
        coefficients: f.coefficients,
        standard_errors: f.standardErrors,
        covariance: f.covariance,
        log_likelihood_null: f.logLikelihoodNull,
        log_likelihood: f.logLikelihood,
        lr_chi2: f.chi2,
        informative_strata: f.informativeStrata,
      }
    },
    { except: [separated] },
  )
  refuses('conditional-logit.json', separated, ({ x, case: cases, stratum }) => conditionalLogit(x, cases, stratum))

  it('does not change when a column is shifted within strata', () => {
    const x = [[1], [2], [5], [3], [4], [4.5]]
    const cases = [0, 1, 0, 1, 0, 1]
    const stratum = ['a', 'a', 'a', 'b', 'b', 'b']
    const plain = conditionalLogit(x, cases, stratum)
    const moved = conditionalLogit(
      x.map((r, i) => [r[0]! + (i < 3 ? 100 : -7)]),
      cases,
      stratum,
    )
    expect(moved.coefficients[0]).toBeCloseTo(plain.coefficients[0]!, 8)
  })

  it('throws without a stratum that tells', () => {
    expect(() => conditionalLogit([[1], [2]], [1, 1], [1, 1])).toThrow(
      expect.objectContaining({ code: 'too_few_values' }),
    )
  })
})
