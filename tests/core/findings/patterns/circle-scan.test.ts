import { describe, expect, it } from 'vitest'
import { circleScan, fullestArc } from '../../../../core/findings/patterns/circle-scan.ts'
import { gathered } from '../../../../core/findings/patterns/gathered.ts'
import { seededRandom } from '../../../../core/statistics/random.ts'

describe('fullestArc', () => {
  it('has the chance that Stevens (1939) gives for all n points in one arc: n w^(n − 1), w up to a half', () => {
    const [n, width, throws] = [4, 0.3, 20_000]
    const random = seededRandom('stevens')
    let all = 0
    for (let i = 0; i < throws; i++) {
      if (fullestArc(Array.from({ length: n }, random.uniform), width) === n) all++
    }
    const chance = n * width ** (n - 1)
    // four standard errors of a share of 20,000 throws
    expect(Math.abs(all / throws - chance)).toBeLessThan(4 * Math.sqrt((chance * (1 - chance)) / throws))
  })

  it('passes the cut of the circle', () => {
    expect(fullestArc([0.99, 0.01, 0.5], 0.05)).toBe(2)
    expect(fullestArc([0.1, 0.2, 0.3], 1)).toBe(3)
  })
})

describe('circleScan', () => {
  it('finds a narrow gathering among events at random that Rayleigh’s test would not', () => {
    const random = seededRandom('narrow')
    const places = [
      ...Array.from({ length: 20 }, random.uniform),
      ...Array.from({ length: 6 }, () => 0.7 + random.normal(0, 0.001)),
    ]
    const found = circleScan(places)
    expect(found.p).toBeLessThan(0.001)
    expect(found.within).toBeGreaterThanOrEqual(6)
    expect(found.from).toBeGreaterThan(0.69)
    expect(found.until).toBeLessThan(0.71)
  })

  it('does not depend on where the circle is cut, nor on the order of events', () => {
    const random = seededRandom('turn')
    const places = Array.from({ length: 15 }, random.uniform)
    const turned = places.map((x) => (x + 0.37) % 1).reverse()
    const [a, b] = [circleScan(places), circleScan(turned)]
    expect([b.p, b.within, b.width]).toEqual([a.p, a.within, a.width])
  })

  it('cries wolf no oftener than it says', () => {
    let alarms = 0
    for (let seed = 0; seed < 400; seed++) {
      const random = seededRandom(seed)
      if (circleScan(Array.from({ length: 9 }, random.uniform)).p < 0.05) alarms++
    }
    // Binomial(400, 0.05): 34 or more has a chance of 0.2 %; fixed seeds never flicker
    expect(alarms).toBeLessThan(34)
    // few counts are possible with nine events, so it may be shy, but not blind
    expect(alarms).toBeGreaterThan(4)
  })
})

describe('gathered', () => {
  it('recovers a gathering among events at random, also across the cut', () => {
    const random = seededRandom('mixture')
    const places = Array.from({ length: 400 }, (_, i) => {
      const x = i % 4 === 0 ? random.uniform() : 0.995 + random.normal(0, 0.01)
      return x - Math.floor(x)
    })
    const { middle, spread, share, gain } = gathered(places)
    expect(Math.min(Math.abs(middle - 0.995), Math.abs(middle + 1 - 0.995))).toBeLessThan(0.003)
    expect(spread).toBeCloseTo(0.01, 2)
    expect(share).toBeCloseTo(0.75, 1)
    expect(gain).toBeGreaterThan(100)
  })
})
