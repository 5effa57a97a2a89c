import { describe, expect, it } from 'vitest'
import { carriers } from '../../../../core/findings/next/carriers.ts'
import { seededRandom } from '../../../../core/statistics/random.ts'
import { seriesOf } from '../../../../core/timeline/series.ts'
import { contains, spansOf } from '../../../../core/timeline/spans.ts'
import type { Thing } from '../../../../core/timeline/timeline.ts'
import { HOUR, loadOn, MINUTE, START, timelineOf } from '../timeline-of.ts'

const END = START + 168 * HOUR
const known = spansOf([[START, END]])
const wet = spansOf([
  [START + 20 * HOUR, START + 40 * HOUR],
  [START + 100 * HOUR, START + 110 * HOUR],
])

function circuit(ref: string, inTheWet: number): Thing {
  const random = seededRandom(ref)
  const t = Array.from({ length: 168 * 6 }, (_, i) => START + i * 10 * MINUTE)
  const leakage = seriesOf(
    t,
    t.map((ms) => 1 + (contains(wet, ms) ? inTheWet : 0) + random.normal(0, 0.1)),
  )
  return { ...loadOn(ref, [[START, END]], START, END), of: `circuit:${ref}`, kind: 'circuit', circuit: ref, leakage }
}

describe('carriers', () => {
  const windows = new Map([['rain', { inside: wet, known }]])

  it('finds the circuit whose own leakage rises in the wet', () => {
    const things = [circuit('1', 0), circuit('garden', 2.5), circuit('2', 0.1)]
    expect(carriers(timelineOf({ things }), windows)).toEqual(new Map([['rain', 'garden']]))
  })

  it('finds none without a rise, without own channels, or for a thing of known place', () => {
    expect(carriers(timelineOf({ things: [circuit('1', 0.1), circuit('2', 0)] }), windows).size).toBe(0)
    expect(carriers(timelineOf({ things: [loadOn('sign', [], START, END)] }), windows).size).toBe(0)
    const things = [circuit('1', 3)]
    expect(carriers(timelineOf({ things }), new Map([['circuit:1', { inside: wet, known }]])).size).toBe(0)
  })
})
