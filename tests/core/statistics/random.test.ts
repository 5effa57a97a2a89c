import { describe, expect, it } from 'vitest'
import { chiSquaredUpperTail } from '../../../core/statistics/chi-squared.ts'
import { hashText } from '../../../core/statistics/hash-text.ts'
import { poissonPmf } from '../../../core/statistics/poisson-pmf.ts'
import { type Random, seededRandom } from '../../../core/statistics/random.ts'

function draws(n: number, draw: (r: Random) => number): number[] {
  const random = seededRandom('bakery')
  return Array.from({ length: n }, () => draw(random))
}

/** Mean and variance; bounds below are five standard errors of each at n draws. */
function moments(x: readonly number[]): { mean: number; variance: number } {
  const mean = x.reduce((a, b) => a + b, 0) / x.length
  return { mean, variance: x.reduce((a, b) => a + (b - mean) ** 2, 0) / x.length }
}

describe('seededRandom', () => {
  it('repeats itself for the same seed and differs for near seeds', () => {
    const first = (seed: number | string): number[] => {
      const r = seededRandom(seed)
      return [r.uniform(), r.uniform(), r.uniform()]
    }
    expect(first(1)).toEqual(first(1))
    expect(first('freezer')).toEqual(first('freezer'))
    const seen = [first(0), first(1), first('1'), first('freezer'), first('freezes')].map((x) => x[0])
    expect(new Set(seen).size).toBe(5)
  })

  it('draws uniform values that fill 100 cells evenly', () => {
    const cells = new Array<number>(100).fill(0)
    for (const u of draws(20_000, (r) => r.uniform())) cells[Math.floor(u * 100)]!++
    const chi2 = cells.reduce((sum, c) => sum + (c - 200) ** 2 / 200, 0)
    const p = chiSquaredUpperTail(chi2, 99)
    expect(p).toBeGreaterThan(1e-4)
    expect(p).toBeLessThan(1 - 1e-4)
  })

  it('has no memory from one draw to the next', () => {
    const u = draws(20_001, (r) => r.uniform() - 0.5)
    const product = u.slice(1).reduce((sum, x, i) => sum + x * u[i]!, 0) / 20_000
    expect(Math.abs(product)).toBeLessThan(5 / 12 / Math.sqrt(20_000))
  })

  it('draws normal and exponential values with their moments', () => {
    const normal = moments(draws(20_000, (r) => r.normal(3, 2)))
    expect(Math.abs(normal.mean - 3)).toBeLessThan((5 * 2) / Math.sqrt(20_000))
    expect(Math.abs(normal.variance - 4)).toBeLessThan(5 * 4 * Math.sqrt(2 / 20_000))
    const exponential = moments(draws(20_000, (r) => r.exponential(6)))
    expect(Math.abs(exponential.mean - 6)).toBeLessThan((5 * 6) / Math.sqrt(20_000))
    expect(Math.abs(exponential.variance - 36)).toBeLessThan(5 * 36 * Math.sqrt(8 / 20_000))
  })

  it.each([0.3, 4, 12, 250])('draws Poisson counts with mean %s', (mean) => {
    const n = 20_000
    const counts = new Map<number, number>()
    for (const k of draws(n, (r) => r.poisson(mean))) counts.set(k, (counts.get(k) ?? 0) + 1)
    let chi2 = 0
    let cells = 0
    let rest = n
    let restExpected = n
    for (let k = 0; k < mean + 12 * Math.sqrt(mean) + 12; k++) {
      const expected = n * poissonPmf(k, mean)
      if (expected < 10) continue
      const seen = counts.get(k) ?? 0
      chi2 += (seen - expected) ** 2 / expected
      rest -= seen
      restExpected -= expected
      cells++
    }
    chi2 += (rest - restExpected) ** 2 / restExpected
    expect(chiSquaredUpperTail(chi2, cells)).toBeGreaterThan(1e-4)
  })

  it('draws whole numbers evenly, picks and shuffles', () => {
    const cells = [0, 0, 0, 0, 0, 0, 0]
    for (const k of draws(14_000, (r) => r.integer(7))) cells[k]!++
    expect(
      chiSquaredUpperTail(
        cells.reduce((s, c) => s + (c - 2000) ** 2 / 2000, 0),
        6,
      ),
    ).toBeGreaterThan(1e-4)
    const items = Object.freeze([1, 2, 3, 4, 5])
    const shuffled = seededRandom(5).shuffle(items)
    expect([...shuffled].sort()).toEqual([1, 2, 3, 4, 5])
    expect(items).toContain(seededRandom(5).pick(items))
  })

  it('refuses impossible draws', () => {
    const r = seededRandom(1)
    expect(() => r.integer(0)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
    expect(() => r.poisson(-1)).toThrow(expect.objectContaining({ code: 'out_of_range' }))
    expect(() => r.pick([])).toThrow(expect.objectContaining({ code: 'too_few_values' }))
  })
})

describe('hashText', () => {
  it('tells texts apart that differ in one letter or in order', () => {
    const texts = ['', 'a', 'b', 'ab', 'ba', 'oven 1', 'oven 2', 'Öfen', 'Ofen']
    expect(new Set(texts.map((t) => hashText(t))).size).toBe(texts.length)
    expect(hashText('oven 1', 1)).not.toBe(hashText('oven 1', 2))
  })
})
