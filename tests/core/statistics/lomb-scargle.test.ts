import { describe, expect, it } from 'vitest'
import { lombScargle, lombScargleFalseAlarm } from '../../../core/statistics/lomb-scargle.ts'
import { matchReference } from './reference.ts'

describe('lombScargle', () => {
  // A constant series has no normalised power: the file gives null, ours throws.
  matchReference(
    'lomb-scargle.json',
    ({ t, y, frequency }) => {
      const plain = lombScargle(t, y, frequency)
      const floating = lombScargle(t, y, frequency, { floatingMean: true })
      // astropy takes for the largest frequency the end of its own grid: steps of 1 / (5 length) from half a step on, rounded to even.
      const step = 1 / (5 * (t.at(-1) - t[0]))
      const steps = (Math.max(...frequency) - step / 2) / step
      const whole = steps % 1 === 0.5 ? 2 * Math.round(steps / 2) : Math.round(steps)
      const highest = step / 2 + step * whole
      return {
        power_standard: plain.power,
        peak_frequency: frequency[plain.peak],
        peak_power_standard: plain.power[plain.peak],
        power_standard_floating_mean: floating.power,
        peak_frequency_floating_mean: frequency[floating.peak],
        peak_power_floating_mean: floating.power[floating.peak],
        p_baluev_floating_mean: lombScargleFalseAlarm(floating.power[floating.peak]!, t, highest),
      }
    },
    { except: ['constant series'] },
  )

  it('does not change when time is shifted or values are shifted and scaled', () => {
    const t = [0.1, 0.9, 2.2, 2.9, 4.4, 5.1, 6.6]
    const y = [1, 3, 2, 5, 1, 4, 2]
    const plain = lombScargle(t, y, [0.1, 0.31, 0.44])
    const moved = lombScargle(
      t.map((v) => v + 1000),
      y.map((v) => 7 - 3 * v),
      [0.1, 0.31, 0.44],
    )
    plain.power.forEach((p, i) => {
      expect(moved.power[i]).toBeCloseTo(p, 9)
    })
  })

  it('throws zero_spread and too_few_values', () => {
    expect(() => lombScargle([0, 1, 2, 3], [3, 3, 3, 3], [0.1])).toThrow(
      expect.objectContaining({ code: 'zero_spread' }),
    )
    expect(() => lombScargle([0, 1], [3, 4], [0.1])).toThrow(expect.objectContaining({ code: 'too_few_values' }))
  })
})
