import { describe, expect, it } from 'vitest'
import type { Suspect } from '../../../core/contract/findings.ts'
import { type Lined, nextSteps } from '../../../core/findings/isolation.ts'
import { HOUR, loadOn, START, timelineOf } from './timeline-of.ts'

const suspect = (of: string, probability: number, given: Partial<Suspect> = {}): Suspect => ({
  of,
  label: of,
  probability,
  share: 0,
  grade: probability >= 0.9 ? 'strong' : 'slight',
  role: 'trigger',
  because: [],
  next: '',
  ...given,
})
const END = START + 168 * HOUR
const things = [
  { ...loadOn('1', [[START, END]], START, END), of: 'circuit:1', kind: 'circuit' as const },
  loadOn('sign', [[START, START + 10 * HOUR]], START, END),
]
const week = timelineOf({ things })
const lined = (given: Partial<Lined>): Lined => ({
  suspects: [],
  sets: [],
  trips: 3,
  budget: [],
  standingMa: null,
  windows: new Map(),
  spread: null,
  ...given,
})
const sign = (weight: number) => [
  { of: ['load:sign'], weight, expected: [3] },
  { of: [], weight: 1 - weight, expected: [] },
]

describe('nextSteps', () => {
  it('puts the own test of what no switch isolates first when it leads', () => {
    const steps = nextSteps(
      week,
      168,
      lined({
        suspects: [suspect('rain', 0.95, { next: 'Look for water.' }), suspect('load:sign', 0.3)],
        sets: [{ of: ['rain'], weight: 0.7, expected: [3] }, ...sign(0.3).slice(0, 1)],
      }),
    )
    expect(steps[0]).toMatchObject({ isolate: null })
    expect(steps[0]!.text).toMatch(/^Look for water\. Dry trips/)
    expect(steps[1]!.isolate).toBe('load:sign')
  })

  it.each([
    ['clock', { localTime: '03:10' }, /at 03:10 with a clamp/],
    ['period', { hours: 6 }, /cycle of 6 hours/],
    ['sun', {}, /dusk/],
    ['load-current', {}, /both poles/],
    ['standing', {}, /sum and no single fault/],
    ['supply', {}, /other devices/],
    ['device', {}, /no waiting/],
    ['unlisted', { next: 'Walk the site.' }, /Walk the site/],
  ])('has a test of its own for %s', (of, given, words) => {
    const [step] = nextSteps(week, 168, lined({ suspects: [suspect(of, 0.8, given)] }))
    expect(step!.text).toMatch(words)
  })

  it('isolates until the question is settled with 90 % odds, and says what a trip and a quiet spell would mean', () => {
    const [step] = nextSteps(week, 168, lined({ suspects: [suspect('load:sign', 0.5)], sets: sign(0.5) }))
    // Gamma(3.5, 168 h): quiet by chance (168 / (168 + t))^3.5; settled at 1/9, t = 146.8 h: seven days
    expect(step).toMatchObject({ isolate: 'load:sign', days: 7 })
    expect(step!.settles).toBeGreaterThanOrEqual(0.9)
    expect(step!.text).toMatch(/Unplug sign .* for seven days/)
    expect(step!.text).toMatch(/\(now 0\.50\), a trip on the first day below 0\.01/)
    expect(step!.settlesByBreaker).toBeUndefined()
  })

  it('says how much less the breaker alone proves', () => {
    const sets = [
      { of: ['circuit:1'], weight: 0.5, expected: [3] },
      { of: [], weight: 0.5, expected: [] },
    ]
    const board = timelineOf({ things: [{ ...things[0]!, isolation: 'single-pole' }] })
    const [step] = nextSteps(board, 168, lined({ suspects: [suspect('circuit:1', 0.5)], sets }))
    expect(step!.isolate).toBe('circuit:1')
    expect(step!.text).toMatch(/Isolate circuit 1 in both poles .* leaves what leaks from the neutral/)
    expect(step!.settlesByBreaker!).toBeLessThanOrEqual(step!.settles)
  })

  it('takes a thing that nobody can judge for what may be behind trips without a cause', () => {
    const unjudged = suspect('load:sign', 0.3, { grade: 'unjudged' })
    const steps = nextSteps(week, 168, lined({ suspects: [unjudged], sets: [{ of: [], weight: 1, expected: [] }] }))
    expect(steps[0]!.isolate).toBe('load:sign')
  })

  it('says how long the logger must stay while nothing is sure', () => {
    const steps = nextSteps(week, 168, lined({ suspects: [suspect('none', 0.7)] }))
    // 168 (0.1^(-1/3.5) - 1) = 156.4 h
    expect(steps.some((s) => /at least one more trip in 6\.5\d? days with 90 % odds, three more in/.test(s.text))).toBe(
      true,
    )
  })

  it('asks for a logger where there was none, and for the spread where standing leakage leads', () => {
    const steps = nextSteps(week, 168, lined({ suspects: [suspect('standing', 0.7)], spread: 'On two devices: …' }))
    expect(steps[0]!.text).toMatch(/On two devices/)
    expect(steps.some((s) => s.text.startsWith('Put a leakage logger on the tails of this device: it catches'))).toBe(
      true,
    )
  })

  it('asks for a longer stay without a trip, and says how rare they are at most', () => {
    const [step] = nextSteps(week, 168, lined({ trips: 0 }))
    // rule of three: 2.9957 in 168 h
    expect(step!.text).toMatch(/Leave the logger.*fewer than 3 a week/)
  })
})
