import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { type Stratified, stratified } from '../../../../core/findings/preferring/stratified.ts'
import { type Strata, stratifier } from '../../../../core/findings/preferring/stratum-exposure.ts'
import { binomialUpperTail } from '../../../../core/statistics/binomial.ts'
import { conditionalLogit } from '../../../../core/statistics/conditional-logit.ts'
import { firthLogistic } from '../../../../core/statistics/firth-logistic.ts'
import { mantelHaenszelRates, type RateStratum } from '../../../../core/statistics/mantel-haenszel.ts'
import { seededRandom } from '../../../../core/statistics/random.ts'
import { localClock } from '../../../../core/timeline/local-clock.ts'
import { contains, type Spans, shift, spansOf, totalMs } from '../../../../core/timeline/spans.ts'
import { HOUR, START } from '../timeline-of.ts'

const DAY = 24 * HOUR
const utc = localClock('UTC')

interface Story {
  readonly days: number
  readonly inside: Spans
  readonly trips: readonly { readonly from: number; readonly to: number }[]
  readonly at?: number
  readonly known?: Spans
}

function of({ days, inside, trips, at = START, known }: Story, strata: Strata = 'hour'): Stratified {
  const end = at + days * DAY
  return stratified(stratifier(utc, at, end, strata), { inside, known: known ?? spansOf([[at, end]]) }, trips)!
}

const instants = (...hours: readonly number[]) => hours.map((h) => ({ from: START + h * HOUR, to: START + h * HOUR }))
/** From `h` on for `length` hours on each of the days. */
const daily = (h: number, length: number, days: readonly number[]): Spans =>
  spansOf(days.map((d) => [START + d * DAY + h * HOUR, START + d * DAY + (h + length) * HOUR] as const))
const range = (n: number): number[] => Array.from({ length: n }, (_, i) => i)

describe('stratified', () => {
  it('is the closed form of one stratum: Firth adds half a trip to each cell', () => {
    // All trips at 20 h, exposed on 2 of 8 days: x = 4 of 5 inside, (4.5 / 1.5) · (6 / 2) = 9.
    const inside = daily(20, 1, [0, 1])
    const found = of({ days: 8, inside, trips: instants(20.2, 20.4, 44.2, 44.6, 20.5 + 5 * 24) })
    expect(found).toMatchObject({ telling: 5, inside: 4, expected: 1.25 })
    expect(found.ratio).toBeCloseTo(9, 4)
    // P(X ≥ 4), X binomial(5, 1/4): 5 · (1/4)^4 · 3/4 + (1/4)^5 = 16 / 1024.
    expect(found.p).toBeCloseTo(16 / 1024, 12)
  })

  it('agrees with penalised logistic regression where a cell is empty', () => {
    const inside = daily(20, 1, [0, 1])
    const found = of({ days: 4, inside, trips: instants(20.2, 20.4, 44.2) })
    expect(Number.isFinite(found.ratio!)).toBe(true)
    // exposed half of the time: odds of being inside are ψ, so ln ψ is the intercept. firthLogistic is checked against R.
    const fit = firthLogistic([[1], [1], [1]], [1, 1, 1], { confidence: 0.9 })
    expect(Math.log(found.ratio!)).toBeCloseTo(fit.coefficients[0]!, 5)
    expect(Math.log(found.low)).toBeCloseTo(fit.low[0]!, 4)
  })

  it('takes away what the hours of the day alone explain', () => {
    // Runs 18-20 h on six of seven days; trips come in those hours whatever runs.
    const inside = daily(18, 2, [0, 1, 2, 3, 4, 5])
    const trips = instants(18.5, 42.5, 67.2, 90.1, 114.9, 139.6, 163.5)
    const found = of({ days: 7, inside, trips })
    expect(found.inside).toBe(6)
    // (12 h of 168 h would let 0.5 be expected)
    expect(found.expected).toBeCloseTo(6, 9)
    expect(found.p).toBeGreaterThan(0.5)
    expect(found.low).toBeLessThan(1)
  })

  it('says that nothing tells when it always ran at the hours of the trips', () => {
    const found = of({ days: 7, inside: daily(3, 1, range(7)), trips: instants(3.5, 27.5) })
    expect(found).toMatchObject({ telling: 0, ratio: null, p: 1 })
    expect(found.expected).toBeCloseTo(2, 9)
  })

  it('is near the rate ratio of Mantel and Haenszel with many trips', () => {
    const random = seededRandom('strata')
    const days = 60
    const end = START + days * DAY
    const inside = spansOf(
      range(days * 24).flatMap((h) => {
        const evening = h % 24 >= 16
        return random.uniform() < (evening ? 0.6 : 0.15) ? [[START + h * HOUR, START + (h + 0.5) * HOUR] as const] : []
      }),
    )
    const trips: { from: number; to: number }[] = []
    while (trips.length < 250) {
      const at = Math.floor(START + random.uniform() * (end - START))
      const rate = (contains(inside, at - 1) ? 3 : 1) * ((at / HOUR) % 24 >= 16 ? 4 : 1)
      if (random.uniform() < rate / 12) trips.push({ from: at, to: at })
    }
    const found = of({ days, inside, trips })
    const strata = range(24).map((hour): RateStratum => {
      const here = trips.filter((t) => Math.floor(((t.from - 1) / HOUR) % 24) === hour)
      const exposed = range(days).reduce(
        (sum, d) => sum + (contains(inside, START + d * DAY + hour * HOUR) ? 0.5 : 0),
        0,
      )
      const hits = here.filter((t) => contains(inside, t.from - 1)).length
      return [hits, exposed, here.length - hits, days - exposed]
    })
    const published = mantelHaenszelRates(strata, { confidence: 0.9 })
    // Two estimators of one ratio: apart by much less than their standard error.
    expect(Math.abs(Math.log(found.ratio!) - Math.log(published.rateRatio!))).toBeLessThan(
      0.3 * published.logStandardError!,
    )
    expect(Math.log(found.low)).toBeCloseTo(Math.log(published.low!), 1)
    expect(Math.log(found.high)).toBeCloseTo(Math.log(published.high!), 1)
    expect(found.p).toBeLessThan(1e-6)
  })

  it('is a case-crossover with every minute of the same weekday and hour as referent', () => {
    const random = seededRandom('crossover')
    const days = 56
    const inside = spansOf(
      range(days * 24).flatMap((h) =>
        random.uniform() < 0.3 ? [[START + h * HOUR, START + h * HOUR + 1_200_000]] : [],
      ) as [number, number][],
    )
    const trips: { from: number; to: number }[] = []
    while (trips.length < 80) {
      const at = START + Math.floor(random.uniform() * days * 24 * 60) * 60_000 + 30_000
      if (random.uniform() < (contains(inside, at) ? 1 : 0.3)) trips.push({ from: at, to: at })
    }
    const found = of({ days, inside, trips }, 'weekday-hour')
    // conditionalLogit is checked against R's clogit; one row a minute of each stratum that has a trip
    const stratumOf = (t: number) => {
      const day = Math.floor((t - START) / DAY)
      return Math.floor(day / 28) * 168 + (day % 7) * 24 + Math.floor((t / HOUR) % 24)
    }
    const x: number[][] = []
    const cases: number[] = []
    const sets: number[] = []
    trips.forEach((trip, set) => {
      const stratum = stratumOf(trip.from - 1)
      x.push([contains(inside, trip.from - 1) ? 1 : 0])
      cases.push(1)
      sets.push(set)
      for (let m = 0; m < days * 24 * 60; m++) {
        const t = START + m * 60_000 + 15_000
        if (stratumOf(t) !== stratum) continue
        x.push([contains(inside, t) ? 1 : 0])
        cases.push(0)
        sets.push(set)
      }
    })
    const fit = conditionalLogit(x, cases, sets)
    // The penalty moves ln ψ by less than a quarter of its standard error at eighty trips.
    expect(Math.abs(Math.log(found.ratio!) - fit.coefficients[0]!)).toBeLessThan(0.25 * fit.standardErrors[0]!)
  })

  it('spreads an interval over its strata and counts it for no more than it shows', () => {
    // Night 22-06 h, exposed in one hour of it every other day.
    const inside = daily(3, 1, [0, 2, 4, 6])
    const night = { from: START + 22 * HOUR, to: START + 30 * HOUR }
    const found = of({ days: 8, inside, trips: [night] })
    expect(found.inside).toBe(0)
    expect(found.expected).toBeCloseTo(1 / 16, 9)
    expect(of({ days: 8, inside, trips: [{ from: START + 46 * HOUR, to: START + 54 * HOUR }] }).inside).toBe(1 / 8)
    expect(of({ days: 8, inside, trips: [night] }).p).toBe(1)
  })
})

describe('a site with habits', () => {
  it('accuses an innocent evening load no oftener than it says, where the plain test mostly does', () => {
    // 200 sites, trips and an unrelated load both mostly in the evening; p <= 0.05 at most binomial(200, 0.05): 99.9 % below 21.
    let [plain, like] = [0, 0]
    const days = 21
    for (let site = 0; site < 200; site++) {
      const random = seededRandom(`habit ${site}`)
      const inside = spansOf(
        range(days).flatMap((d) =>
          random.uniform() < 0.7
            ? [[START + d * DAY + 18 * HOUR, START + d * DAY + (19 + 2 * random.uniform()) * HOUR] as const]
            : [],
        ),
      )
      const trips = range(9).map(() => {
        const hour = random.uniform() < 0.8 ? 18 + 3 * random.uniform() : 24 * random.uniform()
        return instants(random.integer(days) * 24 + hour)[0]!
      })
      const found = of({ days, inside, trips })
      const share = totalMs(inside) / (days * DAY)
      if (binomialUpperTail(found.inside, 9, share, 1 - share) <= 0.05) plain++
      if (found.p <= 0.05) like++
    }
    expect(plain).toBeGreaterThan(100)
    expect(like).toBeLessThan(21)
  })
})

describe('laws', () => {
  const story = (seed: number): Story => {
    const random = seededRandom(seed)
    const inside = spansOf(
      range(40).map(() => {
        const at = START + random.uniform() * 27 * DAY
        return [at, at + random.exponential(2 * HOUR)] as const
      }),
    )
    return { days: 29, inside, trips: range(9).map(() => instants(1 + random.uniform() * 27 * 24)[0]!) }
  }

  it('does not depend on the order of trips, nor on cuts in the exposure', () => {
    fc.assert(
      fc.property(fc.integer(), fc.constantFrom<Strata>('hour', 'weekday-hour'), (seed, strata) => {
        const s = story(seed)
        const a = of(s, strata)
        const b = of({ ...s, trips: [...s.trips].reverse() }, strata)
        expect(b.p).toBeCloseTo(a.p, 12)
        expect(b.expected).toBeCloseTo(a.expected, 9)
        const cut = START + 10 * DAY + 17
        const pieces: number[] = []
        for (let i = 0; i < s.inside.length; i += 2) {
          const [from, to] = [s.inside[i]!, s.inside[i + 1]!]
          pieces.push(...(from < cut && cut < to ? [from, cut, cut, to] : [from, to]))
        }
        const c = of({ ...s, inside: Float64Array.from(pieces) }, strata)
        expect(c.p).toBeCloseTo(a.p, 9)
        expect(c.expected).toBeCloseTo(a.expected, 9)
      }),
      { numRuns: 20 },
    )
  })

  it('is the same a week later', () => {
    fc.assert(
      fc.property(fc.integer(), fc.constantFrom<Strata>('hour', 'weekday-hour'), (seed, strata) => {
        const s = story(seed)
        const week = 7 * DAY
        const moved = {
          ...s,
          at: START + week,
          inside: shift(s.inside, week),
          trips: s.trips.map((t) => ({ from: t.from + week, to: t.to + week })),
        }
        const [a, b] = [of(s, strata), of(moved, strata)]
        expect(b.p).toBeCloseTo(a.p, 9)
        expect(b.expected).toBeCloseTo(a.expected, 9)
      }),
      { numRuns: 20 },
    )
  })
})
