import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { BudgetLine } from '../../../core/contract/findings.ts'
import { spread } from '../../../core/findings/spread.ts'
import { seededRandom } from '../../../core/statistics/random.ts'

function lineOf(of: string, ma: number, half: number): BudgetLine {
  return { of, ma, low: ma - half, high: ma + half, basis: 'switching', switchings: 9 }
}

/** Least possible load of the most loaded device, by trying all n^k ways. */
function bruteForce(sizes: readonly number[], n: number): number {
  let best = Number.POSITIVE_INFINITY
  for (let code = 0; code < n ** sizes.length; code++) {
    const loads = new Array<number>(n).fill(0)
    let rest = code
    for (const size of sizes) {
      loads[rest % n]! += size
      rest = Math.floor(rest / n)
    }
    best = Math.min(best, Math.max(...loads))
  }
  return best
}

describe('spread', () => {
  it('beats largest-first where that is not the best', () => {
    // Graham (1969), SIAM J. Appl. Math. 17, 416-429: 3, 3, 2, 2, 2 on two machines; the rule makes 7, the best is 6.
    const lines = [3, 3, 2, 2, 2].map((ma, i) => lineOf(`circuit:${i + 1}`, ma, 0))
    expect(spread(lines, 2).worstMa).toBeCloseTo(6, 9)
  })

  it('is as good as trying every way, within 0.01 mA', () => {
    const random = seededRandom('spread')
    for (let round = 0; round < 60; round++) {
      const n = 2 + random.integer(2)
      const lines = Array.from({ length: 3 + random.integer(6) }, (_, i) =>
        lineOf(`circuit:${i}`, random.exponential(2), random.uniform() * 0.5),
      )
      const best = bruteForce(
        lines.map((l) => l.high!),
        n,
      )
      const found = spread(lines, n)
      expect(found.worstMa).toBeGreaterThanOrEqual(best - 1e-9)
      expect(found.worstMa).toBeLessThanOrEqual(best + 0.01)
      expect(found.devices.flatMap((d) => d.of).sort()).toEqual(lines.map((l) => l.of).sort())
    }
  })

  it('parts five circuits as well as they can be parted', () => {
    // Korf (1998), Artificial Intelligence 106, 181-203 (from memory): 4, 5, 6, 7, 8; largest first makes 17 and 13, the best is 15 and 15.
    const lines = [4, 5, 6, 7, 8].map((ma, i) => lineOf(`circuit:${i + 1}`, ma, 0))
    expect(spread(lines, 2).worstMa).toBe(15)
    expect(spread(lines, 3).worstMa).toBe(bruteForce([4, 5, 6, 7, 8], 3))
  })

  it('is exact for any circuits, and keeps to the laws of such plans', () => {
    const circuits = fc.array(fc.integer({ min: 0, max: 400 }), { minLength: 1, maxLength: 9 })
    fc.assert(
      fc.property(circuits, fc.constantFrom(2, 3), (tenths, n) => {
        const sizes = tenths.map((x) => x / 10)
        const lines = sizes.map((ma, i) => lineOf(`circuit:${i}`, ma, 0))
        const { worstMa, exact } = spread(lines, n)
        expect(exact).toBe(true)
        // sizes are tenths of a milliamp, so that within 0.01 mA is exact
        expect(worstMa).toBeCloseTo(bruteForce(sizes, n), 9)
        expect(spread([...lines].reverse(), n).worstMa).toBeCloseTo(worstMa, 9)
        expect(spread(lines, n + 1).worstMa).toBeLessThanOrEqual(worstMa + 1e-9)
        expect(spread([...lines, lineOf('circuit:spare', 0, 0)], n).worstMa).toBeCloseTo(worstMa, 9)
        const scaled = lines.map((l) => lineOf(l.of, 3 * l.ma!, 0))
        expect(spread(scaled, n).worstMa).toBeCloseTo(3 * worstMa, 9)
      }),
      { numRuns: 60 },
    )
  })

  it('comes to an end with 24 circuits on four devices', () => {
    const random = seededRandom('board')
    const lines = Array.from({ length: 24 }, (_, i) => lineOf(`circuit:${i}`, random.exponential(1.5), 0.1))
    const total = lines.reduce((sum, l) => sum + l.high!, 0)
    expect(spread(lines, 4).worstMa).toBeLessThan(total / 4 + 0.02)
  })

  it('leaves loads to their circuits and circuits without a figure out', () => {
    const unjudged: BudgetLine = { of: 'circuit:9', ma: null, low: null, high: null, basis: 'unjudged', switchings: 0 }
    const found = spread([lineOf('circuit:1', 2, 0.1), lineOf('load:mixer', 1, 0.1), unjudged], 2)
    expect(found.devices.map((d) => d.of)).toEqual([['circuit:1'], []])
    expect(found.unjudged).toEqual(['circuit:9'])
  })

  it('refuses no device at all', () => {
    expect(() => spread([], 0)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
  })
})
