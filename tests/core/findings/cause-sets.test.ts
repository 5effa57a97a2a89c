import { describe, expect, it } from 'vitest'
import { type CauseWindow, marginal } from '../../../core/findings/cause-sets.ts'

/**
 * Direct numerical integration of the same model over the intensities, on a grid of their logarithms (trapezium).
 * The priors are written out here from the doc comment of `marginal`, not imported.
 */
function byGrid(hours: number, trips: number, causes: readonly CauseWindow[]): number {
  const priors =
    causes.length === 0
      ? [{ a: 1, b: hours / Math.max(1, trips), t: hours }]
      : [
          { a: 0.5, b: (0.5 * hours) / (0.2 * Math.max(1, trips)), t: hours },
          ...causes.map((c) => ({ a: 1, b: c.hours / Math.max(1, trips), t: c.hours })),
        ]
  const points = 160
  const grids = priors.map(({ a, b }) => {
    const low = Math.log(a / b) - 22 / Math.min(1, a)
    const high = Math.log(a / b) + 5
    const step = (high - low) / points
    return Array.from({ length: points + 1 }, (_, i) => {
      const lambda = Math.exp(low + i * step)
      const gammaOfShape = a === 1 ? 1 : Math.sqrt(Math.PI) // Γ(1) and Γ(1/2)
      const density = (b ** a / gammaOfShape) * lambda ** a * Math.exp(-b * lambda) // times λ: d log λ
      return { lambda, weight: density * step * (i === 0 || i === points ? 0.5 : 1) }
    })
  })
  let total = 0
  const walk = (j: number, lambdas: number[], weight: number): void => {
    if (j < grids.length) {
      for (const p of grids[j]!)
        walk(j + 1, [...lambdas, p.lambda], weight * p.weight * Math.exp(-p.lambda * priors[j]!.t))
      return
    }
    let likelihood = 1
    for (let i = 0; i < trips; i++) {
      let intensity = lambdas[0]!
      causes.forEach((c, k) => {
        intensity += c.weights[i]! * lambdas[k + 1]!
      })
      likelihood *= intensity
    }
    total += weight * likelihood
  }
  walk(0, [], 1)
  return Math.log(total)
}

const window = (hours: number, weights: number[]): CauseWindow => ({ hours, weights: Float64Array.from(weights) })

describe('marginal', () => {
  // methods.md §8: "agreement with direct numerical integration on small cases". The grid above is the second way.
  it.each([
    ['no cause', 100, 4, []],
    ['no trip', 100, 0, [window(10, [])]],
    ['one cause, instants', 100, 4, [window(10, [1, 1, 1, 0])]],
    ['one cause, intervals and leakage', 168, 5, [window(12, [1, 0.3, 2.4, 0, 0.05])]],
    ['two causes apart', 100, 4, [window(10, [1, 1, 0, 0]), window(20, [0, 0, 1, 0])]],
    ['two causes that overlap', 100, 4, [window(10, [1, 1, 0.5, 0]), window(20, [1, 0, 1, 0.2])]],
  ] as const)('agrees with integration on a grid: %s', (_, hours, trips, causes) => {
    expect(marginal(hours, trips, causes).log).toBeCloseTo(byGrid(hours, trips, causes), 3)
  })

  it('does not depend on the order of trips or causes', () => {
    const a = window(10, [1, 1, 0.5, 0, 0])
    const b = window(20, [1, 0, 1, 0.2, 0])
    const c = window(5, [0, 0, 1, 0, 1])
    const turned = (w: CauseWindow): CauseWindow => window(w.hours, [...w.weights].reverse())
    const first = marginal(100, 5, [a, b, c])
    const second = marginal(100, 5, [turned(c), turned(a), turned(b)])
    expect(second.log).toBeCloseTo(first.log, 10)
    expect(second.expected[1]).toBeCloseTo(first.expected[0]!, 10)
  })

  it('gives every trip to someone: expected trips of the causes never exceed the trips they touch', () => {
    const m = marginal(100, 6, [window(10, [1, 1, 1, 1, 0, 0]), window(30, [0, 0, 1, 1, 1, 0])])
    expect(m.expected[0]! + m.expected[1]!).toBeLessThanOrEqual(5)
    expect(m.expected[0]!).toBeGreaterThan(2)
  })

  it.each([25, 40, 60])('is approximated well for %i trips of two causes', (n) => {
    const a = window(
      20,
      Array.from({ length: n }, (_, i) => (i % 2 === 0 ? 1 : 0.1)),
    )
    const b = window(
      60,
      Array.from({ length: n }, (_, i) => (i % 3 === 0 ? 1 : 0.4)),
    )
    const exact = marginal(400, n, [a, b], 'exact')
    const close = marginal(400, n, [a, b], 'laplace')
    // Stirling's relative error at the shapes 1/2 and 1 of the priors is 1/6 and 1/12 (Abramowitz & Stegun 6.1.37):
    // a nat of a third is far below what moves a grade.
    expect(Math.abs(close.log - exact.log)).toBeLessThan(0.35)
    expect(Math.abs(close.expected[0]! - exact.expected[0]!)).toBeLessThan(0.08 * n)
  })
})
