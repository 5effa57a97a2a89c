import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { breakpoints } from '../../../core/statistics/breakpoints.ts'
import { changepointBiweight } from '../../../core/statistics/changepoint-biweight.ts'
import { changepointL2 } from '../../../core/statistics/changepoint-l2.ts'
import { changepointPoisson } from '../../../core/statistics/changepoint-poisson.ts'
import type { Partition } from '../../../core/statistics/partition.ts'
import { seededRandom } from '../../../core/statistics/random.ts'
import { matchReference } from './reference.ts'

function keys(p: Partition): Record<string, unknown> {
  return {
    changepoints: [...p.changepoints],
    segment_values: p.values,
    segment_costs: p.segmentCosts,
    cost: p.cost,
    penalised_cost: p.penalisedCost,
  }
}

/** Least penalised cost over all partitions, by trying every one. */
function bruteForce(n: number, cost: (from: number, to: number) => number, penalty: number): number {
  const best = [-penalty]
  for (let t = 1; t <= n; t++) best.push(Math.min(...best.slice(0, t).map((b, from) => b + cost(from, t) + penalty)))
  return best[n]!
}

const series = fc.array(fc.integer({ min: -20, max: 20 }), { minLength: 1, maxLength: 30 })
const penalties = fc.double({ min: 0.5, max: 200, noNaN: true })

describe('changepointL2', () => {
  matchReference('changepoint-l2.json', ({ y, penalty, min_segment }) =>
    keys(changepointL2(y, { penalty, minSegment: min_segment })),
  )

  it('is optimal with and without a least length', () => {
    fc.assert(
      fc.property(series, penalties, (y, penalty) => {
        const cost = (from: number, to: number): number => {
          const part = y.slice(from, to)
          const mean = part.reduce((a, b) => a + b, 0) / part.length
          return part.reduce((sum, v) => sum + (v - mean) ** 2, 0)
        }
        expect(changepointL2(y, { penalty }).penalisedCost).toBeCloseTo(bruteForce(y.length, cost, penalty), 7)
        const atLeast2 = (from: number, to: number): number =>
          to - from < 2 ? Number.POSITIVE_INFINITY : cost(from, to)
        fc.pre(y.length > 1)
        const got = changepointL2(y, { penalty, minSegment: 2 }).penalisedCost
        expect(got).toBeCloseTo(bruteForce(y.length, atLeast2, penalty), 7)
      }),
    )
  })
})

describe('changepointBiweight', () => {
  matchReference('changepoint-biweight.json', ({ y, penalty, k }) => {
    const p = changepointBiweight(y, { penalty, k })
    const outliers: number[] = []
    let segment = 0
    y.forEach((v: number, i: number) => {
      if (i === p.changepoints[segment]) segment++
      if (Math.abs(v - p.values[segment]!) > k) outliers.push(i)
    })
    return { ...keys(p), outliers }
  })

  it('is optimal', () => {
    fc.assert(
      fc.property(series, penalties, fc.integer({ min: 1, max: 15 }), (y, penalty, k) => {
        // The best level of a segment is the mean of some run of its sorted values.
        const cost = (from: number, to: number): number => {
          const sorted = y.slice(from, to).sort((a, b) => a - b)
          let least = Number.POSITIVE_INFINITY
          for (let i = 0; i < sorted.length; i++) {
            let sum = 0
            for (let j = i; j < sorted.length; j++) {
              sum += sorted[j]!
              const level = sum / (j - i + 1)
              least = Math.min(
                least,
                sorted.reduce((s, v) => s + Math.min((v - level) ** 2, k * k), 0),
              )
            }
          }
          return least
        }
        const got = changepointBiweight(y, { penalty, k })
        expect(got.penalisedCost).toBeCloseTo(bruteForce(y.length, cost, penalty), 7)
      }),
      { numRuns: 60 },
    )
  })

  it('mirrors, shifts and scales with the values', () => {
    const random = seededRandom('steps')
    const y = Array.from(
      { length: 300 },
      (_, i) => (i % 100 < 40 ? 2.1 : 0) + random.normal(0, 0.2) + (i % 37 === 0 ? 9 : 0),
    )
    const plain = changepointBiweight(y, { penalty: 0.5, k: 0.6 })
    const moved = changepointBiweight(
      y.map((v) => 1e5 - 3 * v),
      { penalty: 4.5, k: 1.8 },
    )
    expect(plain.changepoints.length).toBe(5)
    expect(moved.changepoints).toEqual(plain.changepoints)
    expect(moved.values[1]).toBeCloseTo(1e5 - 3 * plain.values[1]!, 6)
  })

  it('gets through a day of readings once a second with a step an hour and one spike in fifty', () => {
    // Levels are drawn at least 0.5 apart against a noise of 0.1, so every change must be found to within a few readings.
    const random = seededRandom('a day')
    const n = 86_400
    const y = Float64Array.from({ length: n }, (_, i) => {
      const level = 1 + 0.5 * (Math.floor(i / 3600) % 4)
      return level + random.normal(0, 0.1) + (random.uniform() < 0.02 ? random.normal(0, 20) : 0)
    })
    const { changepoints } = changepointBiweight(y, { penalty: 2 * 0.01 * Math.log(n), k: 0.3 })
    const missed = Array.from({ length: 23 }, (_, h) => (h + 1) * 3600).filter(
      (at) => !changepoints.some((c) => Math.abs(c - at) <= 5),
    )
    expect(missed).toEqual([])
    expect(changepoints.length).toBeLessThan(40)
  })

  it.each([
    ['not_finite', [1, Number.NaN], 1, 1],
    ['out_of_range', [1, 2], -1, 1],
    ['out_of_range', [1, 2], 1, 0],
  ])('throws %s', (code, y, penalty, k) => {
    expect(() => changepointBiweight(y, { penalty, k })).toThrow(expect.objectContaining({ code }))
  })
})

describe('changepointPoisson', () => {
  matchReference('changepoint-poisson.json', ({ y, penalty, min_segment }) =>
    keys(changepointPoisson(y, { penalty, minSegment: min_segment })),
  )

  it('does not move its changes when exposure is measured in another unit', () => {
    const counts = [0, 1, 0, 2, 9, 11, 8, 0, 1]
    const hours = [24, 24, 20, 24, 24, 22, 24, 24, 24]
    const a = changepointPoisson(counts, { penalty: 5, exposure: hours })
    const b = changepointPoisson(counts, { penalty: 5, exposure: hours.map((h) => h / 24) })
    expect([...a.changepoints]).toEqual([4, 7])
    expect(b.changepoints).toEqual(a.changepoints)
    expect(b.values[1]).toBeCloseTo(24 * a.values[1]!, 10)
  })

  it('refuses counts that are none', () => {
    expect(() => changepointPoisson([1.5], { penalty: 1 })).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})

describe('breakpoints', () => {
  matchReference('breakpoints.json', ({ y, h }) => {
    const minSegment = h < 1 ? Math.floor(h * y.length) : h
    // The package tries ⌈n / minSegment⌉ − 2 breaks.
    const found = breakpoints(y, { minSegment, maxBreaks: Math.ceil(y.length / minSegment) - 2 })
    return { min_segment: minSegment, best_breaks: found.best.changepoints.length }
  })

  it('agrees with breakpoints.json on every partition', async () => {
    const { referenceCases } = await import('./reference.ts')
    for (const { input, expected } of referenceCases('breakpoints.json')) {
      const want = expected.partitions as { last_index: number[]; rss: number; bic: number }[]
      const { partitions } = breakpoints(input.y, {
        minSegment: expected.min_segment as number,
        maxBreaks: want.length - 1,
      })
      want.forEach((w, b) => {
        expect(partitions[b]!.changepoints).toEqual(w.last_index)
        expect(Math.abs(partitions[b]!.rss - w.rss)).toBeLessThan(1e-8 * w.rss)
        expect(Math.abs(partitions[b]!.bic - w.bic)).toBeLessThan(1e-8 * w.bic)
      })
    }
  })

  it('throws for a series shorter than a segment', () => {
    expect(() => breakpoints([1, 2], { minSegment: 3 })).toThrow(expect.objectContaining({ code: 'too_few_values' }))
  })
})
