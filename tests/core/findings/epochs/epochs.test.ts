import { describe, expect, it } from 'vitest'
import { Epochs } from '../../../../core/contract/findings.ts'
import { epochs } from '../../../../core/findings/epochs/epochs.ts'
import { seededRandom } from '../../../../core/statistics/random.ts'
import { seriesOf } from '../../../../core/timeline/series.ts'
import { complement, spansOf } from '../../../../core/timeline/spans.ts'
import type { Timeline } from '../../../../core/timeline/timeline.ts'
import { HOUR, MINUTE, START, timelineOf, tripAt } from '../timeline-of.ts'

const DAY = 24 * HOUR

/** Ten days at one reading in ten seconds round the given trips; half an hour of nothing after each. */
function logged(
  trips: readonly number[],
  level: (ms: number, before: number) => number,
  given: Partial<Timeline> = {},
) {
  const from = given.from ?? START
  const to = from + 10 * DAY
  const dead = spansOf(trips.map((at) => [at, at + 30 * MINUTE] as const))
  const energised = complement(dead, from, to)
  const sorted = [...trips].sort((a, b) => a - b)
  const n = (10 * DAY) / 10_000
  const t = Array.from({ length: n }, (_, i) => from + i * 10_000)
  let next = 0
  const v = t.map((ms) => {
    while (next < sorted.length && sorted[next]! + 30 * MINUTE <= ms) next++
    const at = sorted[next] ?? Number.POSITIVE_INFINITY
    return ms >= at ? 0.02 : level(ms, at - ms)
  })
  return timelineOf({
    from,
    to,
    leakage: seriesOf(t, v),
    energised,
    logged: energised,
    trips: trips.map((at) => tripAt(at)),
    ...given,
  })
}

const daily = (ms: number): number => 9 + 2 * Math.sin((2 * Math.PI * ms) / DAY)
const days = [1, 2, 4, 5, 7, 8].map((d) => START + d * DAY + 15 * HOUR + d * 3 * MINUTE)

describe('epochs', () => {
  const random = seededRandom('epochs')
  const found = epochs(logged(days, (ms, before) => daily(ms) + (before <= 3 * MINUTE ? 5 : 0) + random.normal(0, 0.1)))

  it('is the mean of the courses, by minutes and then more closely', () => {
    expect(Epochs.parse(found)).toEqual(found)
    expect(found.trips).toBe(6)
    expect(found.minutes.length).toBeLessThanOrEqual(120)
    expect(found.minutes[0]).toBe(-59.5)
    expect(found.minutes.at(-1)).toBeCloseTo(-10 / 120, 3)
    expect(found.minutes).toEqual([...found.minutes].sort((a, b) => a - b))
    // 16 readings or more in the mean of each minute: standard error below 0.05 mA
    expect(found.ma[0]!).toBeCloseTo(days.reduce((sum, at) => sum + daily(at - 59.5 * MINUTE), 0) / days.length, 1)
    expect(found.ma.at(-1)!).toBeCloseTo(days.reduce((sum, at) => sum + daily(at) + 5, 0) / days.length, 0)
  })

  it('says from when on the leakage leaves what is usual at those hours', () => {
    expect(found.text).toMatch(/above what is usual at those hours from 3 minutes before on, by 5\.\d mA just before/)
    found.minutes.forEach((minute, k) => {
      const out = found.ma[k]! > found.high[k]!
      expect(out).toBe(minute > -3)
    })
  })

  it('leaves the band in one of ten logs without any warning', () => {
    // 60 logs: false alarms at the very end are binomial with at most 0.1; 99.9 % below 15.
    let alarms = 0
    for (let log = 0; log < 60; log++) {
      const draw = seededRandom(`log ${log}`)
      const wander = Array.from({ length: 10 * 24 + 1 }, () => draw.normal(0, 1))
      const trips = [1, 3, 4, 6, 8].map((d) => START + Math.floor((d + draw.uniform()) * DAY))
      const { text } = epochs(logged(trips, (ms) => 9 + wander[Math.floor((ms - START) / HOUR)]!))
      if (!/no common warning/.test(text)) alarms++
    }
    expect(alarms).toBeLessThan(15)
  })

  it('does not take the fall itself, seen early, for the course', () => {
    const early = logged(days, (ms, before) => (before <= 10_000 ? 0.03 : daily(ms)))
    expect(epochs(early).ma.at(-1)!).toBeGreaterThan(6)
  })

  it('leaves out where the device was open', () => {
    // closed again only 20 minutes before the next trip
    const at = days[0]!
    const again = at + 50 * MINUTE
    const pair = epochs(logged([at, again, ...days.slice(1)], daily))
    expect(pair.trips).toBe(7)
  })

  it('is the same a week later', () => {
    const noise = (): ((ms: number) => number) => {
      const draw = seededRandom('noise')
      return () => daily(0) + draw.normal(0, 0.2)
    }
    const plain = epochs(logged(days, noise()))
    const week = 7 * DAY
    expect(
      epochs(
        logged(
          days.map((t) => t + week),
          noise(),
          { from: START + week },
        ),
      ),
    ).toEqual(plain)
  })

  it('has words for too little: no log, two trips, intervals only, no other day', () => {
    expect(epochs(timelineOf({ trips: days.map((t) => tripAt(t)) })).text).toMatch(/^No leakage is logged/)
    expect(epochs(logged(days.slice(0, 2), daily))).toMatchObject({ trips: 2, minutes: [] })
    expect(epochs(logged(days.slice(0, 2), daily)).text).toMatch(/too few for a common course/)
    const vague = logged(days, daily, { trips: days.map((t) => tripAt(t - 5 * HOUR, t)) })
    expect(epochs(vague).text).toMatch(/^No trip has a known moment/)
    const oneDay = logged(days, daily, { from: START + DAY, to: START + DAY + 23 * HOUR })
    const short = [9, 12, 15, 18].map((h) => START + DAY + h * HOUR)
    const alone = epochs({ ...oneDay, trips: short.map((t) => tripAt(t)) })
    expect(alone.trips).toBe(4)
    expect(alone.low.every((x) => x === null)).toBe(true)
    expect(alone.text).toMatch(/too few other days/)
  })
})
