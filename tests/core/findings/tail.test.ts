import { describe, expect, it } from 'vitest'
import { heldLevels } from '../../../core/findings/standing.ts'
import { levelTail } from '../../../core/findings/tail.ts'
import { paretoQuantile } from '../../../core/statistics/generalised-pareto.ts'
import { seededRandom } from '../../../core/statistics/random.ts'
import { spansOf } from '../../../core/timeline/spans.ts'
import type { Timeline } from '../../../core/timeline/timeline.ts'
import { HOUR, MINUTE, START, timelineOf, tripAt } from './timeline-of.ts'

/** Spells of a quarter of an hour whose peaks exceed 14 mA by a generalised Pareto amount, on a level that stays below. */
function spellLog(seed: number, days: number, perDay: number, shape: number): Timeline {
  const random = seededRandom(seed)
  const n = days * 24 * 60
  const t = Float64Array.from({ length: n }, (_, i) => START + i * MINUTE)
  const v = Float64Array.from(t, () => 10 + random.normal(0, 0.2))
  for (let d = 0; d < days; d++) {
    for (let k = 0; k < perDay; k++) {
      // spells stand in slots of their own, at least two hours apart
      const start = d * 1440 + Math.floor((k + 0.2 * random.uniform()) * (1440 / perDay))
      const peak = 14 + paretoQuantile({ shape, scale: 1.5 }, random.uniform())
      for (let m = 0; m < 15; m++) v[start + m] = Math.max(v[start + m]!, peak * (m === 7 ? 1 : 0.98))
    }
  }
  const logged = spansOf([[START, START + days * 24 * HOUR]])
  return timelineOf({ days, leakage: { t, v }, logged })
}

const tailOf = (timeline: Timeline, tripMa: number) =>
  levelTail(timeline, heldLevels(timeline.leakage!, timeline.energised), tripMa)

describe('levelTail', () => {
  it('holds the true rate beyond the log nine times of ten', () => {
    // 8 spells a day; P(Y > y) = (1 + ξ y/σ)^(−1/ξ), the definition of the distribution
    let held = 0
    const shape = -0.1
    const trip = 20
    const truth = 8 * 7 * (1 + (shape * (trip - 14)) / 1.5) ** (-1 / shape)
    for (let seed = 1; seed <= 60; seed++) {
      const tail = tailOf(spellLog(seed, 14, 8, shape), trip)!
      if (tail.low! <= truth && truth <= tail.high!) held++
    }
    // 54 expected, standard deviation 2.3
    expect(held).toBeGreaterThanOrEqual(45)
  })

  it('foretells a longer log from a shorter one', () => {
    const year = spellLog(5, 120, 8, 0.05)
    const cut = START + 21 * 24 * HOUR
    const k = year.leakage!.t.findIndex((t) => t >= cut)
    const first = timelineOf({
      days: 21,
      leakage: { t: year.leakage!.t.slice(0, k), v: year.leakage!.v.slice(0, k) },
      logged: spansOf([[START, cut]]),
    })
    const trip = 19
    const tail = tailOf(first, trip)!
    let later = 0
    let last = 0
    year.leakage!.t.forEach((t, i) => {
      if (t < cut || year.leakage!.v[i]! <= trip) return
      if (t - last > HOUR) later++
      last = t
    })
    const perWeek = later / ((120 - 21) / 7)
    expect(perWeek).toBeGreaterThan(tail.low!)
    expect(perWeek).toBeLessThan(tail.high!)
  })

  it('is not shown where the data do not carry it', () => {
    expect(tailOf(spellLog(1, 2, 8, 0), 20)).toBeNull() // two days
    expect(tailOf(spellLog(1, 14, 1, 0), 20)).toBeNull() // fourteen spells
    expect(tailOf(spellLog(1, 14, 8, -0.3), 60)).toBeNull() // a trip current far beyond everything seen
  })

  it('leaves out spells that a trip cut short', () => {
    const log = spellLog(3, 14, 8, 0)
    const high = log.leakage!.t.filter((_, i) => log.leakage!.v[i]! > 14)
    const trips = [tripAt(high.at(-1)! + MINUTE)]
    expect(tailOf({ ...log, trips }, 20)!.spells).toBe(tailOf(log, 20)!.spells! - 1)
  })
})
