import { describe, expect, it } from 'vitest'
import type { Hourly } from '../../../../core/findings/patterns/hourly.ts'
import { standingRain } from '../../../../core/findings/patterns/hourly.ts'
import { levelPeriod } from '../../../../core/findings/patterns/level-period.ts'
import { type Law, levelResponse } from '../../../../core/findings/patterns/level-response.ts'
import { median } from '../../../../core/statistics/median.ts'
import { seededRandom } from '../../../../core/statistics/random.ts'
import { START } from '../timeline-of.ts'

const hours = (v: Float64Array): Hourly => ({ from: START, step: 1, v })

/** Showers: a spell about every four days, some hours long. */
function showers(n: number, seed: string): Float64Array {
  const random = seededRandom(`showers ${seed}`)
  const v = new Float64Array(n)
  for (let at = random.exponential(60); at < n; at += random.exponential(96) + 8) {
    for (let k = 0; k < 2 + random.integer(5); k++) if (at + k < n) v[Math.floor(at) + k] = random.exponential(2)
  }
  return v
}

/** A level with a slow wander of its own. */
function wander(n: number, seed: string): Float64Array {
  const random = seededRandom(`wander ${seed}`)
  let level = 0
  return Float64Array.from({ length: n }, () => {
    level = 0.8 * level + random.normal(0, 0.3)
    return level
  })
}

const lawsOf = (rain: Float64Array): Law[] =>
  [1, 2, 4, 8, 16, 32].map((halfLife) => ({ halfLife, driver: standingRain(hours(rain), halfLife), amount: 10 }))

describe('levelResponse', () => {
  it('recovers lag, decay and rise of planted responses, its interval holding the truth as often as it says', () => {
    let held = 0
    const lags: number[] = []
    const rises: number[] = []
    for (let seed = 0; seed < 20; seed++) {
      const rain = showers(28 * 24, `s${seed}`)
      const law = standingRain(hours(rain), 8).v
      const level = wander(rain.length, `s${seed}`).map((x, i) => x + 0.2 * (law[i - 5] ?? 0))
      const found = levelResponse(hours(level), lawsOf(rain))!
      expect(found.p).toBe(0.01)
      expect([4, 8, 16]).toContain(found.halfLife)
      lags.push(found.lag)
      rises.push(found.rise)
      if (found.lagLow <= 5 && found.lagHigh >= 5) held++
    }
    expect(median(lags)).toBe(5)
    expect(median(rises)).toBeCloseTo(2, 0)
    // nominal 90 %: Binomial(20, 0.9), 15 or fewer has a chance of 4 %
    expect(held).toBeGreaterThan(15)
  })

  it('sees no response in rain that has none, however both wander', () => {
    let alarms = 0
    for (let seed = 0; seed < 60; seed++) {
      const rain = showers(21 * 24, `none ${seed}`)
      if (levelResponse(hours(wander(rain.length, `none ${seed}`)), lawsOf(rain))!.p < 0.05) alarms++
    }
    // Binomial(60, 0.05): 8 or more has a chance of 1.1 %
    expect(alarms).toBeLessThan(8)
  })

  it('says nothing of two days, or of a driver that never changes', () => {
    const rain = showers(50, 'short')
    expect(levelResponse(hours(wander(50, 'short')), lawsOf(rain))).toBeNull()
    expect(levelResponse(hours(wander(500, 'dry')), lawsOf(new Float64Array(500)))).toBeNull()
  })
})

describe('levelPeriod', () => {
  it('finds a swing under a wander, gaps and all', () => {
    const level = wander(28 * 24, 'swing').map((x, i) =>
      i % 50 < 5 ? Number.NaN : x + 0.5 * Math.sin((2 * Math.PI * i) / 17),
    )
    const found = levelPeriod(hours(level))
    expect(found.p).toBeLessThan(0.001)
    expect(Number(found.hours)).toBeCloseTo(17, 0)
    expect(Number(found.swingMa)).toBeGreaterThan(0.8)
    expect(Number(found.swingMa)).toBeLessThan(1.2)
  })

  it('calls no wander a period', () => {
    let alarms = 0
    for (let seed = 0; seed < 60; seed++) {
      if (levelPeriod(hours(wander(21 * 24, `plain ${seed}`))).p! < 0.01) alarms++
    }
    // Binomial(60, 0.01): 5 or more has a chance of 0.03 %
    expect(alarms).toBeLessThan(5)
  })

  it('asks for a longer log', () => {
    expect(levelPeriod(null).verdict).toMatch(/^No leakage is logged/)
    expect(levelPeriod(hours(wander(40, 'short'))).verdict).toMatch(/too short/)
    expect(levelPeriod(hours(new Float64Array(500))).verdict).toBe('The leakage did not change.')
  })
})
