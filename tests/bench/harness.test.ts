import { describe, expect, it } from 'vitest'
import { median, table } from './harness.ts'

describe('table', () => {
  it('aligns what, value and unit', () => {
    const lines = table([
      { what: 'append', value: 1234567.8, unit: 'readings/s', target: '≥ 1,000,000' },
      { what: 'trace of a week', value: 4.567, unit: 'ms' },
    ])
    expect(lines.split('\n')).toEqual([
      '  append           1,234,568 readings/s  aim ≥ 1,000,000',
      '  trace of a week       4.57 ms',
    ])
  })
})

describe('median', () => {
  it('is the middle of an odd number and between the middle two of an even one', () => {
    expect(median(Object.freeze([3, 1, 2]))).toBe(2)
    expect(median(Object.freeze([4, 1, 3, 2]))).toBe(2.5)
  })
})
