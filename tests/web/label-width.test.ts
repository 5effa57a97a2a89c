import { describe, expect, it } from 'vitest'
import { labelWidth } from '../../web/strip/label-width.ts'

describe('labelWidth', () => {
  it('gives a long name the room it needs', () => {
    expect(labelWidth(['Mixer', 'Bakehouse sockets (way 7)'])).toBeGreaterThan(labelWidth(['Outdoor socket (way 13)']))
  })

  it('stays within its limits', () => {
    expect(labelWidth([])).toBe(150)
    expect(labelWidth(['A', 'B'])).toBe(150)
    expect(labelWidth(['x'.repeat(200)])).toBe(260)
  })
})
