import { describe, expect, it } from 'vitest'
import type { Suspect } from '../../../core/contract/findings.ts'
import { nextSteps } from '../../../core/findings/isolation.ts'
import { HOUR, loadOn, START, timelineOf, tripAt } from './timeline-of.ts'

const suspect = (of: string, probability: number, next = ''): Suspect => ({
  of,
  label: of,
  probability,
  share: 0,
  grade: probability >= 0.9 ? 'strong' : 'slight',
  role: 'trigger',
  because: [],
  next,
})
const END = START + 7 * 24 * HOUR
const things = [loadOn('sign', [[START, START + 10 * HOUR]], START, END)]
const trips = [tripAt(START + 20 * HOUR), tripAt(START + 60 * HOUR), tripAt(START + 100 * HOUR)]
const week = timelineOf({ things, trips })

describe('nextSteps', () => {
  it('puts what no switch isolates first when it leads', () => {
    const steps = nextSteps(week, 168, [suspect('rain', 0.95, 'Look for water.'), suspect('load:sign', 0.3)])
    expect(steps[0]).toMatchObject({ isolate: null, text: 'Look for water.' })
    expect(steps[1]!.isolate).toBe('load:sign')
  })

  it('isolates as long as makes a quiet spell by chance one in ten', () => {
    // three trips a week: exp(-3/7 d) = 0.1 at d = 5.37 days, so six whole days
    const [step] = nextSteps(week, 168, [suspect('load:sign', 0.5)])
    expect(step).toMatchObject({ isolate: 'load:sign', days: 6 })
    expect(step!.settles).toBeCloseTo(1 - Math.exp((-3 / 7) * 6), 3)
  })

  it('asks for a longer stay without a trip', () => {
    expect(nextSteps(timelineOf({}), 168, [])[0]!.text).toMatch(/Leave the logger/)
  })
})
