import { describe, expect, it } from 'vitest'
import { type Case, SETTLED, trial } from '../../../../core/findings/next/trial.ts'
import { gammaPoisson, noEventProbability } from '../../../../core/statistics/gamma-poisson.ts'
import { seededRandom } from '../../../../core/statistics/random.ts'

/** Draws from Gamma(shape, rate) for shapes of a whole number and a half: sum of exponentials and half a squared normal. */
function gammaDraw(random: ReturnType<typeof seededRandom>, shape: number, rate: number): number {
  let sum = random.normal() ** 2 / 2
  for (let k = 1; k <= shape; k++) sum += random.exponential()
  return sum / rate
}

describe('trial', () => {
  it('makes a quiet spell by chance as rare as the gamma–Poisson formula says, and Bayes does the rest', () => {
    const belief = gammaPoisson(7, 168)
    const cases: Case[] = [
      { weight: 0.4, guilty: true, left: 0 },
      { weight: 0.6, guilty: false, left: 1 },
    ]
    const found = trial(cases, belief, 72)
    const quiet = noEventProbability(belief, 72)
    expect(found.quietByChance).toBeCloseTo(quiet, 12)
    expect(found.ifQuiet).toBeCloseTo(0.4 / (0.4 + 0.6 * quiet), 12)
    expect(found.ifTrip).toBe(0)
    // Quiet makes it 0.92, a trip 0: settled either way.
    expect(found.settles).toBeCloseTo(1, 8)
    // Mutual information of a yes-or-no question with outcomes quiet and not quiet, plus nothing from the number of trips.
    const seen = 0.4 + 0.6 * quiet
    const h = (p: number): number => -(p * Math.log2(p) + (1 - p) * Math.log2(1 - p))
    expect(found.bits).toBeCloseTo(h(0.4) - seen * h(0.4 / seen), 8)
  })

  it('tells nothing when what is isolated changes nothing', () => {
    const cases: Case[] = [
      { weight: 0.5, guilty: true, left: 1 },
      { weight: 0.5, guilty: false, left: 1 },
    ]
    const found = trial(cases, gammaPoisson(7, 168), 500)
    expect(found.bits).toBeCloseTo(0, 9)
    expect(found).toMatchObject({ settles: 0, ifQuiet: 0.5 })
  })

  it.each([
    ['one suspect', 5, [0.5, 0, 0.5, 1]],
    ['a suspect with a background', 9, [0.35, 0.1, 0.65, 1]],
    ['several cases', 4, [0.2, 0, 0.15, 0.4, 0.65, 1]],
    ['an isolation that may leave the neutral', 6, [0.4, 0, 0.1, 1, 0.5, 1]],
  ])('settles as often as simulated trials do: %s', (name, trips, flat) => {
    // cases as weight, left, …; the last one is innocent
    const cases = Array.from(
      { length: flat.length / 2 },
      (_, i): Case => ({
        weight: flat[2 * i]!,
        left: flat[2 * i + 1]!,
        guilty: i < flat.length / 2 - 1,
      }),
    )
    const hours = 120
    const belief = gammaPoisson(trips, 168)
    const { settles } = trial(cases, belief, hours)
    // Poisson likelihood averaged over the gamma by drawing: independent of the closed form.
    const random = seededRandom(`trial ${name}`)
    const rates = Array.from({ length: 4_000 }, () => gammaDraw(random, belief.shape, belief.rate))
    const tables = cases.map(({ left }) => {
      const table = new Float64Array(40)
      for (const rate of rates) {
        let p = Math.exp(-rate * left * hours)
        for (let k = 0; k < 40; k++) {
          table[k]! += p / rates.length
          p *= (rate * left * hours) / (k + 1)
        }
      }
      return table
    })
    const runs = 4_000
    let settled = 0
    for (let run = 0; run < runs; run++) {
      const u = random.uniform()
      let below = 0
      const truth =
        cases.find((c) => {
          below += c.weight
          return u < below
        }) ?? cases.at(-1)!
      const rate = gammaDraw(random, belief.shape, belief.rate)
      const k = Math.min(39, random.poisson(rate * truth.left * hours))
      const all = cases.reduce((sum, c, i) => sum + c.weight * tables[i]![k]!, 0)
      const guilty = cases.reduce((sum, c, i) => sum + (c.guilty ? c.weight * tables[i]![k]! : 0), 0)
      if (guilty / all >= SETTLED || guilty / all <= 1 - SETTLED) settled++
    }
    // 4,000 runs: standard error at most 0.008.
    expect(Math.abs(settled / runs - settles)).toBeLessThan(0.03)
  })
})
