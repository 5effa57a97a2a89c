import { describe, expect, it } from 'vitest'
import { generalisedPareto, paretoQuantile } from '../../../core/statistics/generalised-pareto.ts'
import { matchReference } from './reference.ts'

describe('generalisedPareto', () => {
  // The file gives null for no exceedance; ours throws (see below).
  matchReference(
    'generalised-pareto.json',
    ({ exceedances }) => {
      const fit = generalisedPareto(exceedances)
      return {
        shape: fit.shape,
        scale: fit.scale,
        log_likelihood: fit.logLikelihood,
        se_shape: fit.shapeError,
        se_scale: fit.scaleError,
        exceedance_quantile: [0.5, 0.9, 0.99, 0.999].map((p) => paretoQuantile(fit, p)),
      }
    },
    { except: ['no exceedance'] },
  )

  it('follows the unit of the exceedances', () => {
    const y = [0.3, 0.1, 1.9, 0.7, 0.2, 0.9, 3.1, 0.4]
    const plain = generalisedPareto(y)
    const scaled = generalisedPareto(y.map((v) => 1000 * v))
    expect(scaled.shape).toBeCloseTo(plain.shape, 6)
    expect(scaled.scale / 1000).toBeCloseTo(plain.scale, 6)
  })

  it.each([
    ['too_few_values', []],
    ['too_few_values', [1, 2, 3, 4]],
    ['out_of_range', [1, 2, 3, 4, 0]],
    ['zero_spread', [2, 2, 2, 2, 2]],
  ])('throws %s', (code, y) => {
    expect(() => generalisedPareto(y)).toThrow(expect.objectContaining({ code }))
  })
})
