import { describe, expect, it } from 'vitest'
import { medcouple } from '../../../core/statistics/medcouple.ts'
import { matchReference } from './reference.ts'

describe('medcouple', () => {
  // The file gives null for no value; ours throws (see below).
  matchReference(
    'medcouple.json',
    ({ x }) => ({ medcouple: medcouple(x), medcouple_of_negative: medcouple(x.map((v: number) => -v)) }),
    { except: ['no value'] },
  )

  it('does not feel shift and scale', () => {
    expect(medcouple([1, 2, 4, 8, 16].map((v) => 3 * v + 100))).toBeCloseTo(medcouple([1, 2, 4, 8, 16]), 12)
  })

  it('throws for no value', () => {
    expect(() => medcouple([])).toThrow(expect.objectContaining({ code: 'too_few_values' }))
  })
})
