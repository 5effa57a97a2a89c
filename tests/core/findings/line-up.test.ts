import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { type Candidate, type ExposureWindow, lineUp } from '../../../core/findings/line-up.ts'

const window = (key: string, hours: number, inside: number[], prior = 1): ExposureWindow => {
  const shares = Float64Array.from(inside)
  return { key, words: key, prior, hoursBy: [hours], weightsBy: [shares], inside: shares, insideHours: hours }
}
const suspect = (of: string, windows: ExposureWindow[], odds = 0.08): Candidate => ({ of, odds, windows })

describe('lineUp', () => {
  it('names the one whose short time holds every trip', () => {
    const culprit = suspect('load:defrost', [window('on', 7, [1, 1, 1, 1, 1, 1, 1, 1])])
    const decoy = suspect('load:mixer', [window('on', 40, [1, 0, 1, 0, 1, 0, 0, 1])])
    const { standings, none } = lineUp(168, 8, [decoy, culprit])
    expect(standings[1]!.probability).toBeGreaterThan(0.95)
    expect(standings[0]!.probability).toBeLessThan(0.2)
    expect(none).toBeLessThan(0.01)
    expect(standings[1]!.share).toBeGreaterThan(0.7)
  })

  it('shares the odds between suspects that were always on together', () => {
    const a = suspect('load:a', [window('on', 10, [1, 1, 1, 1, 1, 1])])
    const b = suspect('load:b', [window('on', 10, [1, 1, 1, 1, 1, 1])])
    const { standings } = lineUp(168, 6, [a, b])
    expect(standings[0]!.probability).toBeCloseTo(standings[1]!.probability, 10)
    expect(standings[0]!.probability).toBeLessThan(0.75)
  })

  it('finds two causes that act apart', () => {
    const a = suspect('load:a', [window('on', 8, [1, 1, 1, 1, 1, 0, 0, 0, 0, 0])])
    const b = suspect('rain', [window('wet', 10, [0, 0, 0, 0, 0, 1, 1, 1, 1, 1])])
    const c = suspect('load:c', [window('on', 60, [1, 0, 0, 1, 0, 1, 0, 0, 1, 0])])
    const { standings } = lineUp(336, 10, [a, b, c])
    expect(standings[0]!.probability).toBeGreaterThan(0.9)
    expect(standings[1]!.probability).toBeGreaterThan(0.9)
    expect(standings[2]!.probability).toBeLessThan(0.1)
  })

  it('pays for every window tried: many narrow chances do not make a clock', () => {
    // one of 500 windows happens to hold 3 of 12 trips
    const windows = Array.from({ length: 500 }, (_, i) =>
      window(
        `w${i}`,
        4,
        Array.from({ length: 12 }, (_, k) => (i === 7 && k < 3 ? 1 : 0)),
        1 / 500,
      ),
    )
    const { standings, none } = lineUp(168, 12, [suspect('clock', windows, 0.06)])
    expect(standings[0]!.probability).toBeLessThan(0.1)
    expect(none).toBeGreaterThan(0.9)
  })

  it('with three trips stays unsure', () => {
    const { standings } = lineUp(168, 3, [suspect('load:a', [window('on', 50, [1, 1, 1])])])
    expect(standings[0]!.probability).toBeLessThan(0.9)
  })

  it('does not depend on the order of trips or of suspects, nor on renaming', () => {
    fc.assert(
      fc.property(
        fc.array(
          fc.tuple(
            fc.double({ min: 1, max: 100, noNaN: true }),
            fc.array(fc.boolean(), { minLength: 6, maxLength: 6 }),
          ),
          {
            minLength: 1,
            maxLength: 5,
          },
        ),
        fc.integer({ min: 1, max: 5 }),
        (raw, turn) => {
          const make = (order: (xs: number[]) => number[], names: string): Candidate[] =>
            raw.map(([hours, inside], i) => suspect(`${names}${i}`, [window('on', hours, order(inside.map(Number)))]))
          const plain = lineUp(
            200,
            6,
            make((x) => x, 'load:'),
          )
          const turned = lineUp(200, 6, make((x) => [...x.slice(turn), ...x.slice(0, turn)], 'circuit:').reverse())
          plain.standings.forEach((s, i) => {
            expect(turned.standings[raw.length - 1 - i]!.probability).toBeCloseTo(s.probability, 8)
          })
          expect(turned.none).toBeCloseTo(plain.none, 8)
        },
      ),
      { numRuns: 60 },
    )
  })

  it('gives shares that add up to one with what stays unexplained', () => {
    const a = suspect('load:a', [window('on', 8, [1, 1, 1, 0, 0])])
    const b = suspect('load:b', [window('on', 20, [0, 1, 1, 1, 0])])
    const l = lineUp(100, 5, [a, b])
    expect(l.standings.reduce((sum, s) => sum + s.share, l.unexplained)).toBeCloseTo(1, 10)
  })

  it('never puts two names of the same thing into one set', () => {
    // both explain half of the trips; as two causes they would both be sure
    const a = { ...suspect('clock', [window('02:00+20', 4, [1, 1, 1, 1, 1, 0, 0, 0, 0, 0])]), family: 'timer' }
    const b = suspect('sun', [window('sunset', 4, [0, 0, 0, 0, 0, 1, 1, 1, 1, 1])])
    const apart = lineUp(336, 10, [a, b])
    const same = lineUp(336, 10, [a, { ...b, family: 'timer' }])
    expect(apart.standings.map((s) => s.probability).every((p) => p > 0.9)).toBe(true)
    expect(same.standings.reduce((sum, s) => sum + s.probability, 0)).toBeLessThan(1.05)
  })

  it('never blames a circuit beside the load on it', () => {
    const circuit = suspect('circuit:1', [window('on', 60, [1, 1, 1, 1, 1, 1, 1, 1])])
    const load = { ...suspect('load:a', [window('on', 6, [1, 1, 1, 1, 1, 1, 1, 0])]), partOf: 'circuit:1' }
    const { standings } = lineUp(336, 8, [circuit, load])
    expect(standings[1]!.probability).toBeGreaterThan(0.9)
    expect(standings[0]!.probability + standings[1]!.probability).toBeLessThan(1.05)
  })

  it('averages over habits by what the trips say for each', () => {
    // Two habits that weigh the exposure as 5 and 50 h; trips that are e^6 times likelier under the second leave it alone.
    const shares = Float64Array.from([1, 1, 1, 1])
    const both = (hoursBy: number[]): ExposureWindow => ({
      key: 'on',
      words: 'on',
      prior: 1,
      hoursBy,
      weightsBy: [shares, shares],
      inside: shares,
      insideHours: hoursBy[0]!,
    })
    const flat = { prior: 0.5, logDensity: 0 }
    const sure = lineUp(168, 4, [suspect('load:a', [both([5, 50])])], [flat, { prior: 0.5, logDensity: 30 }])
    const alone = lineUp(168, 4, [suspect('load:a', [window('on', 50, [1, 1, 1, 1])])])
    expect(sure.standings[0]!.probability).toBeCloseTo(alone.standings[0]!.probability, 8)
    const equal = lineUp(168, 4, [suspect('load:a', [both([5, 5])])], [flat, flat])
    const once = lineUp(168, 4, [suspect('load:a', [window('on', 5, [1, 1, 1, 1])])])
    expect(equal.standings[0]!.probability).toBeCloseTo(once.standings[0]!.probability, 10)
  })
})
