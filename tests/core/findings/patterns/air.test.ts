import { describe, expect, it } from 'vitest'
import { sensible } from '../../../../core/findings/patterns/channel-sense.ts'
import { dewPoint, dewPoints } from '../../../../core/findings/patterns/dew-point.ts'
import { hourlySums, standingRain, withoutDaily } from '../../../../core/findings/patterns/hourly.ts'
import { twoSided } from '../../../../core/findings/patterns/rate-by-hour.ts'
import { binomialCdf, binomialUpperTail } from '../../../../core/statistics/binomial.ts'
import { seriesOf } from '../../../../core/timeline/series.ts'
import { HOUR, START } from '../timeline-of.ts'

describe('dewPoint', () => {
  it.each([
    // Psychrometric chart values of common handbooks, to a tenth (from memory): 20 °C at 50 % 9.3, 25 °C at 60 % 16.7, 30 °C at 30 % 10.5
    [20, 50, 9.3],
    [25, 60, 16.7],
    [30, 30, 10.5],
  ])('%d °C at %d %% is %d °C', (celsius, percent, dew) => {
    expect(Math.abs(dewPoint(celsius, percent) - dew)).toBeLessThan(0.06)
  })

  it('is the temperature itself in saturated air', () => {
    for (const celsius of [-15, 0, 8.5, 31]) expect(dewPoint(celsius, 100)).toBeCloseTo(celsius, 10)
  })

  it('is left out where no temperature stands beside the humidity', () => {
    const humidity = seriesOf([START, START + 5 * HOUR], [50, 60])
    const temperature = seriesOf([START - HOUR], [20])
    expect([...dewPoints(temperature, humidity).t]).toEqual([START])
  })
})

describe('channels that teach nothing', () => {
  const possible = { name: 'temperature', low: -60, high: 70 }
  const of = (values: readonly number[]): ReturnType<typeof sensible> =>
    sensible(
      seriesOf(
        values.map((_, i) => START + i * HOUR),
        values,
      ),
      possible,
    )

  it('are said to be so', () => {
    expect(sensible(null, possible).refused).toBe('No temperature is logged.')
    expect(of([4, 4, 4, 4]).refused).toBe('The temperature did not change.')
    expect(of([4, 900, 5, -999]).refused).toBe('The temperature read is mostly impossible: check its channel.')
  })

  it('lose single impossible readings and stay', () => {
    const values = Array.from({ length: 100 }, (_, i) => (i === 50 ? 999 : i / 10))
    expect(of(values).series?.t).toHaveLength(99)
  })
})

describe('hourly columns', () => {
  it('hold rain standing as Kohler & Linsley add it up: P₀ + k P₁ + k² P₂ …', () => {
    const rain = seriesOf(
      [1, 2, 3, 6].map((h) => START + h * HOUR),
      [4, 0, 2, 1],
    )
    const standing = standingRain(hourlySums(rain, START, START + 8 * HOUR), 3)
    const k = 2 ** (-1 / 3)
    expect(standing.v[0]).toBeCloseTo(4, 12)
    expect(standing.v[2]).toBeCloseTo(4 * k ** 2 + 2, 12)
    expect(standing.v[5]).toBeCloseTo(4 * k ** 5 + 2 * k ** 3 + 1, 12)
  })

  it('lose the rhythm common to all days and nothing else', () => {
    const v = Float64Array.from({ length: 240 }, (_, i) => Math.sin((2 * Math.PI * i) / 24) + (i === 100 ? 5 : 0))
    const left = withoutDaily({ from: START, step: 1, v }).v
    expect(left[99]).toBeCloseTo(0, 12)
    expect(left[100]).toBeCloseTo(4.5, 12)
  })
})

describe('twoSided', () => {
  it('is twice the smaller binomial tail when all chances are equal', () => {
    const chances = new Array<number>(12).fill(0.3)
    for (const within of [0, 2, 4, 7, 12]) {
      const tails = [binomialCdf(within, 12, 0.3, 0.7), binomialUpperTail(within, 12, 0.3, 0.7)]
      expect(twoSided(within, chances)).toBeCloseTo(Math.min(1, 2 * Math.min(...tails)), 10)
    }
  })
})
