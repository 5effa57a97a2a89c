import { describe, expect, it } from 'vitest'
import { patterns } from '../../../../core/findings/patterns/patterns.ts'
import { seededRandom } from '../../../../core/statistics/random.ts'
import { type Series, seriesOf } from '../../../../core/timeline/series.ts'
import { clip, type Spans, spansOf } from '../../../../core/timeline/spans.ts'
import { sunTimes } from '../../../../core/timeline/sun.ts'
import type { Timeline } from '../../../../core/timeline/timeline.ts'
import { HOUR, MINUTE, START, timelineOf, tripAt } from '../timeline-of.ts'

const DAYS = 28

function withTrips(hours: readonly number[], given: Partial<Timeline> = {}): Timeline {
  return timelineOf({ days: DAYS, trips: hours.map((h) => tripAt(START + Math.round(h * HOUR))), ...given })
}

/** Trips at random over four weeks. */
function atRandom(seed: number, n = 12): number[] {
  const random = seededRandom(seed)
  return Array.from({ length: n }, () => random.uniform() * DAYS * 24).sort((a, b) => a - b)
}

/** Weather with a daily rhythm and a wander of its own, and a load current that people make. */
function air(seed: number): Pick<Timeline, 'rain' | 'temperature' | 'humidity' | 'loadCurrent'> {
  const random = seededRandom(`air ${seed}`)
  const t = Array.from({ length: DAYS * 24 }, (_, h) => START + h * HOUR)
  let front = 0
  const celsius = t.map((_, h) => {
    front = 0.97 * front + random.normal(0, 0.6)
    return 12 + 6 * Math.cos((2 * Math.PI * (h - 16)) / 24) + front
  })
  let wetUntil = -1
  const fallen = t.map((_, h) => {
    if (h > wetUntil && random.uniform() < 1 / 70) wetUntil = h + 3 + random.integer(9)
    return h <= wetUntil ? random.exponential(1.5) : 0
  })
  return {
    temperature: seriesOf(t, celsius),
    humidity: seriesOf(
      t,
      celsius.map((c, h) => Math.min(100, 90 - 2 * (c - 8) + (fallen[h]! > 0 ? 10 : 0) + random.normal(0, 3))),
    ),
    rain: seriesOf(t, fallen),
    loadCurrent: seriesOf(
      t,
      t.map((_, h) => 3 + 6 * Math.max(0, Math.cos((2 * Math.PI * (h - 19)) / 24)) + random.exponential(2)),
    ),
  }
}

describe('patterns', () => {
  it('finds a time of day and says it in local time', () => {
    const random = seededRandom('timer')
    const hours = Array.from({ length: 10 }, (_, day) => day * 48 + 3 + random.normal(0, 0.2))
    const found = patterns(withTrips(hours, { sheet: { ...timelineOf({}).sheet, timeZone: 'Europe/Vienna' } }))
    expect(found.clock.p).toBeLessThan(0.001)
    // 03:00 UTC is 05:00 in Vienna's summer time.
    expect(found.clock.localTime).toMatch(/^(04:5|05:0)\d$/)
    expect(found.period.p).toBeLessThan(0.05)
  })

  it('finds a period that no clock keeps', () => {
    const random = seededRandom('defrost')
    const hours = Array.from({ length: 14 }, (_, k) => 5 + 31 * k + random.normal(0, 0.4))
    const found = patterns(withTrips(hours))
    expect(found.period.p).toBeLessThan(0.05)
    // A comb has power at whole fractions of its period too.
    const turns = 31 / Number(found.period.hours)
    expect(Math.abs(turns - Math.round(turns))).toBeLessThan(0.05)
    expect(found.clock.p).toBeGreaterThan(0.05)
  })

  it('cries wolf about one time in twenty at most, whatever is asked', () => {
    const alarms = new Map<string, number>()
    const runs = 200
    for (let seed = 0; seed < runs; seed++) {
      const found = patterns(withTrips(atRandom(seed), air(seed % 10)))
      for (const kind of ['clock', 'weekday', 'period', 'sun', 'rain', 'temperature', 'humidity', 'load'] as const) {
        if (found[kind]!.p! < 0.05) alarms.set(kind, (alarms.get(kind) ?? 0) + 1)
      }
    }
    // Binomial(200, 0.05): 18 or more has a chance of 1.1 %; the seeds are fixed, so this never flickers
    for (const [kind, count] of alarms) expect(count, kind).toBeLessThan(18)
    // tests of counts are shy with twelve trips; the simulated one is not
    expect(alarms.get('period')).toBeGreaterThan(4)
  })

  it('sees a narrow gathering among trips at random', () => {
    const random = seededRandom('narrow')
    const hours = [...atRandom(3, 14), ...[1, 4, 6, 13, 20, 25].map((d) => d * 24 + 3.2 + random.normal(0, 0.03))]
    const found = patterns(withTrips(hours.sort((a, b) => a - b)))
    expect(found.clock.p).toBeLessThan(0.01)
    expect(found.clock.verdict).toMatch(
      /^[67] of \d+ trips came between 03:\d\d and 03:\d\d local time; 0\.\d+ would by chance\.$/,
    )
  })

  it('tells weekends from workdays, and asks for more days when there are few', () => {
    const random = seededRandom('weekend')
    const hours = [5, 6, 12, 13, 19, 20, 26, 27].flatMap((d) => [d * 24 + 24 * random.uniform()]).sort((a, b) => a - b)
    const found = patterns(withTrips(hours))
    expect(found.weekday!.p).toBeLessThan(0.01)
    expect(found.weekday!.verdict).toMatch(/fell on Saturdays and Sundays/)
    const short = timelineOf({ days: 9, trips: [1, 30, 60, 100, 150].map((h) => tripAt(START + h * HOUR)) })
    expect(patterns(short).weekday!.verdict).toBe(
      'Under two weeks do not tell weekdays apart: let the logger stay longer.',
    )
  })

  it('tells sunset from the clock over five weeks, and says when a few days cannot', () => {
    const random = seededRandom('dusk')
    const dusks = (days: number, step: number): number[] =>
      Array.from({ length: Math.floor(days / step) }, (_, k) => {
        const { sunset } = sunTimes(START + (k * step + 0.5) * 24 * HOUR, 47.3, 13.4)
        return (sunset! - START) / HOUR + (20 + random.normal(0, 3)) / 60
      })
    const long = patterns(
      timelineOf({ days: 35, trips: dusks(35, 3).map((h) => tripAt(START + Math.round(h * HOUR))) }),
    )
    expect(long.sun.verdict).toMatch(/minutes after sunset; .* This holds better than any clock time/)
    expect(long.sun).toMatchObject({ event: 'sunset', closer: 'sun' })
    const short = patterns(timelineOf({ days: 5, trips: dusks(5, 1).map((h) => tripAt(START + Math.round(h * HOUR))) }))
    expect(short.sun.verdict).toMatch(
      /Over 4 days sunset moved by \d minutes: clock and sun cannot be told apart yet\.$/,
    )
  })

  it('leaves to the clock what only comes with its hours', () => {
    // always at four in the afternoon, the warmest hour of every day
    const random = seededRandom('warm')
    const hours = [1, 3, 4, 8, 11, 15, 16, 20, 22, 26].map((d) => d * 24 + 16 + random.normal(0, 0.3))
    const found = patterns(withTrips(hours, air(1)))
    expect(found.clock.p).toBeLessThan(0.001)
    expect(found.temperature.p).toBeGreaterThan(0.05)
    expect(found.temperature.verdict).toMatch(
      /^No preference of its own: .* would at the hours of the day at which they came\.$/,
    )
  })

  it('gives the slope of leakage on load current, and calls it a neutral fault only when one law holds', () => {
    const random = seededRandom('neutral')
    const t = Array.from({ length: 7 * 1_440 }, (_, m) => START + m * MINUTE)
    const amps = t.map((_, m) => 2 + 4 * (Math.floor(m / 37) % 3) + random.normal(0, 0.05))
    const minutes = seriesOf(
      t,
      amps.map((a) => 8 + 0.3 * a + random.normal(0, 0.2)),
    )
    const loadCurrent = seriesOf(t, amps)
    const timeline = withTrips([20, 50, 70, 90, 120, 150], { loadCurrent })
    const told = patterns(timeline, { minutes, remainder: null, followsCurrent: true }).load
    expect(told.maPerA).toBeCloseTo(0.3, 1)
    expect(Number(told.maPerALow)).toBeLessThan(0.302)
    expect(Number(told.maPerAHigh)).toBeGreaterThan(0.298)
    expect(told.verdict).toMatch(/as with neutral and earth touching\.$/)
    expect(patterns(timeline, { minutes, remainder: null, followsCurrent: false }).load.verdict).toMatch(
      /single loads explain that as well\.$/,
    )
  })

  it('is not misled by channels that say nothing', () => {
    const t = Array.from({ length: DAYS * 24 }, (_, h) => START + h * HOUR)
    const flat = (value: number): Series =>
      seriesOf(
        t,
        t.map(() => value),
      )
    const found = patterns(
      withTrips(atRandom(4), { rain: flat(0), temperature: flat(20), humidity: flat(-1), loadCurrent: flat(3) }),
    )
    expect(found.rain).toEqual({ verdict: 'It did not rain.', p: null })
    expect(found.temperature.verdict).toBe('The temperature did not change.')
    expect(found.humidity!.verdict).toBe('The humidity read is mostly impossible: check its channel.')
    expect(found.load.verdict).toBe('The load current of the group did not change.')
  })

  it('knows that the far north has no sunset in June', () => {
    const from = Date.UTC(2026, 5, 1)
    const sheet = { ...timelineOf({}).sheet, latitude: 78.2, longitude: 15.6 }
    const trips = [30, 90, 200, 333, 401, 444].map((h) => tripAt(from + h * HOUR))
    const { sun } = patterns(timelineOf({ from, days: 20, trips, sheet }))
    expect(sun).toMatchObject({ verdict: 'No dark or light hours to compare.', p: null })
  })

  it('does not mind the supply being told in more pieces', () => {
    const whole = withTrips(atRandom(8), air(2))
    const cut = START + 100 * HOUR
    const pieces = spansOf([
      [START, cut],
      [cut, whole.to],
    ])
    expect(patterns({ ...whole, energised: pieces })).toEqual(patterns(whole))
  })

  it('reads the same on another zone’s clock, but for the hour it names', () => {
    const hours = Array.from({ length: 10 }, (_, d) => d * 48 + 3 + 0.1 * (d % 3))
    const [utc, tokyo] = ['UTC', 'Asia/Tokyo'].map((timeZone) =>
      patterns(withTrips(hours, { sheet: { ...timelineOf({}).sheet, timeZone } })),
    )
    expect(tokyo!.clock.p).toBeCloseTo(utc!.clock.p!, 9)
    expect(tokyo!.period).toEqual(utc!.period)
    expect(utc!.clock.localFrom).toBe('03:00')
    expect(tokyo!.clock.localFrom).toBe('12:00')
  })

  it('is not fooled by supply that is there at night only', () => {
    const nights = spansOf(
      Array.from({ length: DAYS }, (_, d) => [START + d * 24 * HOUR, START + (d * 24 + 6) * HOUR] as const),
    )
    let alarms = 0
    for (let seed = 0; seed < 40; seed++) {
      const random = seededRandom(seed)
      const hours = Array.from({ length: 12 }, () => 24 * random.integer(DAYS) + 6 * random.uniform()).sort(
        (a, b) => a - b,
      )
      if (patterns(withTrips(hours, { energised: nights })).clock.p! < 0.05) alarms++
    }
    expect(alarms).toBeLessThan(7)
  })

  it('finds a period of hours in a year of trips, and none in supply that comes and goes by one', () => {
    const random = seededRandom('year')
    const some = Array.from({ length: 670 }, (_, k) => 13.1 * k + random.normal(0, 0.5)).filter(
      (h) => h > 0 && random.uniform() < 0.15,
    )
    const year = (hours: readonly number[], energised?: Spans): Timeline =>
      timelineOf({
        days: 365,
        trips: hours.map((h) => tripAt(START + Math.round(h * HOUR))),
        ...(energised === undefined ? {} : { energised }),
      })
    const found = patterns(year(some)).period
    expect(found.p).toBeLessThan(1e-6)
    expect(Number(found.hours)).toBeCloseTo(13.1, 1)
    // supply for four hours in every eleven, trips at random in it
    const turns = Array.from({ length: 790 }, (_, k) => START + k * 11 * HOUR)
    const within = turns.filter(() => random.uniform() < 0.15).map((t) => (t - START) / HOUR + 4 * random.uniform())
    const none = patterns(year(within, spansOf(turns.map((t) => [t, t + 4 * HOUR] as const)))).period
    expect(none.p).toBeGreaterThan(0.05)
  })

  it('sees trips that follow the rain', () => {
    const random = seededRandom('rain')
    const wetDays = [2, 7, 8, 13, 19, 24]
    const t = Array.from({ length: DAYS * 24 }, (_, h) => START + h * HOUR)
    const rain = seriesOf(
      t,
      t.map((_ms, h) => (wetDays.includes(Math.floor(h / 24)) && h % 24 < 5 ? 3 : 0)),
    )
    const hours = wetDays.flatMap((d) => [d * 24 + 2 + random.uniform() * 4, d * 24 + 7 + random.uniform() * 3])
    const found = patterns(withTrips(hours, { rain }))
    expect(found.rain.p).toBeLessThan(0.001)
    expect(found.rain.verdict).toMatch(/^More trips than chance: (1[012]|ten) trips of 12 fell in wet hours/)
    expect(found.temperature).toEqual({ verdict: 'No temperature is logged.', p: null })
  })

  it('says that five trips are the least, and leaves vague ones out', () => {
    expect(patterns(withTrips([1, 50, 99, 200])).clock).toEqual({
      verdict: 'Too few trips with a known time to say.',
      p: null,
      help: 'One trip more would do: until then let the logger stay.',
    })
    const vague = [1, 50, 99, 200, 300].map((h) => tripAt(START + h * HOUR, START + h * HOUR + 40 * MINUTE))
    expect(patterns(timelineOf({ days: DAYS, trips: vague })).clock).toEqual({
      verdict: 'Too few trips with a known time to say.',
      p: null,
      help: '0 of 5 trips are timed within half an hour: a logger on the tails would time the others.',
    })
  })

  it('gives the same answer for the same trips', () => {
    const timeline = withTrips(atRandom(5))
    expect(patterns(timeline)).toEqual(
      patterns({ ...timeline, energised: clip(timeline.energised, START, timeline.to) }),
    )
  })
})
