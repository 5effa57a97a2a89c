import { describe, expect, it } from 'vitest'
import { levelChange } from '../../../../core/findings/proving/level-change.ts'
import { seededRandom } from '../../../../core/statistics/random.ts'
import { seriesOf } from '../../../../core/timeline/series.ts'
import { spansOf } from '../../../../core/timeline/spans.ts'
import type { Timeline } from '../../../../core/timeline/timeline.ts'
import { HOUR, MINUTE, START, timelineOf } from '../timeline-of.ts'

const DAY = 24 * HOUR

/** A log at ten minutes over some days, the level a function of the hours since the start. */
function logged(days: number, level: (hours: number) => number, given: Partial<Timeline> = {}): Timeline {
  const n = (days * DAY) / (10 * MINUTE)
  const t = Array.from({ length: n }, (_, i) => START + i * 10 * MINUTE)
  const span = spansOf([[START, START + days * DAY]])
  return timelineOf({
    days,
    leakage: seriesOf(
      t,
      t.map((ms) => level((ms - START) / HOUR)),
    ),
    logged: span,
    ...given,
  })
}

const evening = (h: number): number => (h % 24 >= 17 && h % 24 < 22 ? 4 : 0)
const change = (timeline: Timeline, hours: number) =>
  levelChange(timeline, timeline.from, START + hours * HOUR, timeline.to)

describe('levelChange', () => {
  it('is the step itself, whatever the habit of the day and the hour of the remedy', () => {
    const timeline = logged(8, (h) => 9 + evening(h) - (h >= 100 ? 2.5 : 0))
    const found = change(timeline, 100)!
    expect(found.changeMa).toBeCloseTo(-2.5, 9)
    expect(found.high).toBeLessThanOrEqual(-2.5 + 1e-9)
    expect(found.driftMaPerDay).toBeNull()
  })

  it('takes a drift off that would look like a change', () => {
    const random = seededRandom('drift')
    const timeline = logged(20, (h) => 9 + 0.15 * (h / 24) + random.normal(0, 0.05))
    const found = change(timeline, 240)!
    expect(found.driftMaPerDay).toBeCloseTo(0.15, 1)
    expect(Math.abs(found.changeMa)).toBeLessThan(0.15)
    // without it the middles of both sides lie ten days apart
    expect(found.afterMa - found.beforeMa).toBeCloseTo(1.5, 1)
  })

  it('covers the truth nine times in ten when days differ from each other', () => {
    // 200 sites with days of their own level: binomial(200, 0.9) has a standard deviation of 4.2.
    let covered = 0
    for (let site = 0; site < 200; site++) {
      const random = seededRandom(`level ${site}`)
      const [before, after] = [3 + random.integer(6), 3 + random.integer(6)]
      const daily = Array.from({ length: before + after }, () => random.normal(0, 0.5))
      const truth = random.normal(-1, 1)
      const timeline = logged(
        before + after,
        (h) => 9 + daily[Math.floor(h / 24)]! + (h >= before * 24 ? truth : 0) + random.normal(0, 0.05),
      )
      const found = change(timeline, before * 24)!
      if (found.driftMaPerDay === null && found.low <= truth && truth <= found.high) covered++
      else if (found.driftMaPerDay !== null) covered += 0.9
    }
    expect(covered / 200).toBeGreaterThan(0.84)
    expect(covered / 200).toBeLessThan(0.96)
  })

  it('never looks at hours without supply', () => {
    const dead = (h: number): boolean => h >= 60 && h < 70
    const energised = spansOf([
      [START, START + 60 * HOUR],
      [START + 70 * HOUR, START + 8 * DAY],
    ])
    const level = (h: number): number => (dead(h) ? 0 : 9 - (h >= 100 ? 1 : 0))
    const found = change(logged(8, level, { energised, logged: energised }), 100)!
    expect(found.changeMa).toBeCloseTo(-1, 9)
    expect(found.low).toBeCloseTo(-1, 9)
  })

  it('has nothing to say without two days on both sides', () => {
    expect(
      change(
        logged(4, () => 9),
        20,
      ),
    ).toBeNull()
    expect(change(timelineOf({ days: 9 }), 100)).toBeNull()
  })

  it('grows with the scale of the milliamps and does not move with a constant', () => {
    const random = seededRandom('scale')
    const noise = Array.from({ length: 8 * 144 }, () => random.normal(0, 0.3))
    const level = (h: number): number => 9 + evening(h) + noise[Math.round(h * 6)]! - (h >= 96 ? 2 : 0)
    const plain = change(logged(8, level), 96)!
    const scaled = change(
      logged(8, (h) => 3 * level(h) + 5),
      96,
    )!
    expect(scaled.changeMa).toBeCloseTo(3 * plain.changeMa, 4)
  })
})
