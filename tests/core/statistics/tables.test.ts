import { describe, expect, it } from 'vitest'
import { fisherExact, type Table } from '../../../core/statistics/fisher-exact.ts'
import {
  breslowDay,
  mantelHaenszel,
  mantelHaenszelExact,
  mantelHaenszelRates,
} from '../../../core/statistics/mantel-haenszel.ts'
import { matchReference } from './reference.ts'

describe('fisherExact', () => {
  matchReference('fisher-exact.json', ({ table, confidence }) => {
    const f = fisherExact(table, { confidence })
    return {
      p_two_sided: f.pTwoSided,
      p_less: f.pLess,
      p_greater: f.pGreater,
      odds_ratio: f.oddsRatio,
      lower: f.low,
      upper: f.high,
    }
  })

  it('turns the odds ratio over when the rows change places', () => {
    const one = fisherExact([
      [7, 3],
      [2, 9],
    ])
    const other = fisherExact([
      [2, 9],
      [7, 3],
    ])
    expect(one.oddsRatio! * other.oddsRatio!).toBeCloseTo(1, 10)
    expect(one.low * other.high).toBeCloseTo(1, 10)
    expect(one.pTwoSided).toBeCloseTo(other.pTwoSided, 12)
  })

  it('refuses counts that are no counts', () => {
    expect(() =>
      fisherExact([
        [1.5, 1],
        [1, 1],
      ]),
    ).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})

describe('mantelHaenszel', () => {
  matchReference('mantel-haenszel.json', ({ kind, strata, confidence }, name) => {
    if (kind === 'person-time') {
      const r = mantelHaenszelRates(strata, { confidence })
      return {
        rate_ratio: r.rateRatio,
        log_rate_ratio_se: r.logStandardError,
        lower: r.low,
        upper: r.high,
        chi2: r.chi2,
        p: r.p,
      }
    }
    const tables = strata.map(([a, b, c, d]: number[]) => [
      [a, b],
      [c, d],
    ]) as Table[]
    const m = mantelHaenszel(tables, { confidence })
    const e = mantelHaenszelExact(tables, { confidence })
    const h = breslowDay(tables)
    expect(h === null, 'one informative stratum, or an infinite odds ratio').toBe(
      name === 'one stratum' || name === 'no b or c anywhere',
    )
    return {
      odds_ratio: m.oddsRatio,
      log_odds_ratio_se: m.logStandardError,
      lower: m.low,
      upper: m.high,
      chi2: m.chi2,
      p: m.p,
      chi2_corrected: m.chi2Corrected,
      p_corrected: m.pCorrected,
      exact_p_two_sided: e.pTwoSided,
      exact_p_less: e.pLess,
      exact_p_greater: e.pGreater,
      exact_odds_ratio: e.oddsRatio,
      exact_lower: e.low,
      exact_upper: e.high,
      breslow_day: h?.breslowDay,
      breslow_day_df: h?.degreesOfFreedom,
      breslow_day_p: h?.p,
      tarone: h?.tarone,
      tarone_p: h?.pTarone,
    }
  })

  it('does not change when a stratum that tells nothing is added, nor with the unit of time', () => {
    const tables: Table[] = [
      [
        [4, 6],
        [2, 9],
      ],
      [
        [3, 3],
        [1, 8],
      ],
    ]
    expect(
      mantelHaenszel([
        ...tables,
        [
          [0, 0],
          [3, 5],
        ],
      ]),
    ).toEqual(mantelHaenszel(tables))
    const hours = mantelHaenszelRates([
      [4, 100, 2, 300],
      [1, 50, 3, 400],
      [5, 10, 0, 0],
    ])
    const days = mantelHaenszelRates([
      [4, 100 / 24, 2, 300 / 24],
      [1, 50 / 24, 3, 400 / 24],
    ])
    expect(days.rateRatio).toBeCloseTo(hours.rateRatio!, 12)
    expect(days.high).toBeCloseTo(hours.high!, 12)
  })

  it('throws for no stratum and for impossible ones', () => {
    expect(() => mantelHaenszel([])).toThrow(expect.objectContaining({ code: 'too_few_values' }))
    expect(() => mantelHaenszelRates([[1, -1, 1, 1]])).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})
