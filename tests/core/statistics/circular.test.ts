import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { kuiper } from '../../../core/statistics/kuiper.ts'
import { meanDirection } from '../../../core/statistics/mean-direction.ts'
import { raoSpacing } from '../../../core/statistics/rao-spacing.ts'
import { rayleigh, rayleighDirected } from '../../../core/statistics/rayleigh.ts'
import { vonMises } from '../../../core/statistics/von-mises.ts'
import { matchReference } from './reference.ts'

// The files give null for no event; ours throw (see the end).
const except = ['no event']
const times = fc.array(fc.double({ min: 0, max: 24, noNaN: true, maxExcluded: true }), { minLength: 1, maxLength: 40 })
const turn = fc.double({ min: -100, max: 100, noNaN: true })

describe('meanDirection', () => {
  matchReference(
    'mean-direction.json',
    ({ values, period }) => {
      const m = meanDirection(values, period)
      return {
        sum_cos: m.sumCos,
        sum_sin: m.sumSin,
        mean_resultant_length: m.resultant,
        mean_direction: m.direction,
        circular_sd_in_unit: m.circularSd,
      }
    },
    { except, circular: ['mean_direction'] },
  )

  it('turns with the events', () => {
    fc.assert(
      fc.property(times, turn, (values, by) => {
        const plain = meanDirection(values, 24)
        const turned = meanDirection(
          values.map((v) => v + by),
          24,
        )
        expect(turned.resultant).toBeCloseTo(plain.resultant, 9)
        fc.pre(plain.resultant > 1e-3)
        const apart = Math.abs(turned.direction! - plain.direction! - by) % 24
        expect(Math.min(apart, 24 - apart)).toBeLessThan(1e-6)
      }),
    )
  })
})

describe('rayleigh', () => {
  matchReference(
    'rayleigh.json',
    ({ values, period, mean_direction_given }) => {
      if (mean_direction_given !== undefined) {
        const v = rayleighDirected(values, period, mean_direction_given)
        return { r0_bar: v.component, z0: v.z, p_series: v.p }
      }
      const r = rayleigh(values, period)
      return { r_bar: r.resultant, z: r.z, p_zar: r.p, p_series: r.pSeries }
    },
    { except },
  )
})

describe('kuiper', () => {
  // One event has v = 1 always, so p is 1; Stephens' formula, which the file repeats, does not hold there.
  matchReference(
    'kuiper.json',
    ({ values, period }) => {
      const k = kuiper(values, period)
      return { v: k.v, v_star: k.vStar, p_stephens: k.p }
    },
    { except: [...except, 'one event'] },
  )

  it('calls one event no evidence', () => {
    expect(kuiper([7.5], 24)).toMatchObject({ v: 1, p: 1 })
  })

  it('does not depend on where the circle is cut', () => {
    fc.assert(
      fc.property(times, turn, (values, by) => {
        expect(
          kuiper(
            values.map((v) => v + by),
            24,
          ).v,
        ).toBeCloseTo(kuiper(values, 24).v, 6)
      }),
    )
  })
})

describe('raoSpacing', () => {
  matchReference(
    'rao-spacing.json',
    ({ values, period }) => {
      const r = raoSpacing(values, period)
      return { u_degrees: 360 * r.u, u_share_of_circle: r.u, p_exact: r.p }
    },
    { except },
  )

  it('has a distribution that starts at 1 and falls', () => {
    fc.assert(
      fc.property(times, turn, (values, by) => {
        const { u, p } = raoSpacing(values, 24)
        expect(p).toBeGreaterThanOrEqual(0)
        expect(p).toBeLessThanOrEqual(1)
        expect(
          raoSpacing(
            values.map((v) => v + by),
            24,
          ).u,
        ).toBeCloseTo(u, 9)
      }),
    )
  })
})

describe('vonMises', () => {
  matchReference(
    'von-mises-kappa.json',
    ({ values, period }) => {
      const v = vonMises(values, period)
      const found = { mean_direction: v.direction, kappa: v.kappa }
      if (v.kappaError === null || v.directionError === null) return found
      return {
        ...found,
        kappa_bias_corrected: v.kappaCorrected,
        se_kappa: v.kappaError,
        se_mean_direction_radians: (v.directionError * 2 * Math.PI) / period,
      }
    },
    { except, circular: ['mean_direction'] },
  )

  it('has a kappa near 1 / (variance in radians) for a tight cluster', () => {
    // For small spread the von Mises distribution is normal with variance 1/kappa; here ±0.01 h of 24 h.
    const { kappa } = vonMises([11.99, 12.01], 24)
    expect(kappa * ((0.01 * 2 * Math.PI) / 24) ** 2).toBeCloseTo(1, 4)
  })
})

describe('all of them', () => {
  it.each([meanDirection, rayleigh, kuiper, raoSpacing, vonMises])(
    '%o refuse no event, gaps and no period',
    (method) => {
      expect(() => method([], 24)).toThrow(expect.objectContaining({ code: 'too_few_values' }))
      expect(() => method([Number.NaN], 24)).toThrow(expect.objectContaining({ code: 'not_finite' }))
      expect(() => method([1], 0)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
    },
  )
})
