import { describe, expect, it } from 'vitest'
import { conductiveTo, magnitude } from '../../../core/simulate/phasor.ts'
import { simulate } from '../../../core/simulate/simulate.ts'
import { wetness } from '../../../core/simulate/weather.ts'
import { lowerBound } from '../../../core/timeline/series.ts'
import { circuit, DAY, load, planOf, START } from './site.ts'

describe('phasors', () => {
  it('add as vectors: 5 mA conductive on 12 mA capacitive reads 13 mA', () => {
    // Right triangle 5, 12, 13.
    const { series } = simulate(planOf([circuit('1', [load('filter', { on: { g: 5, b: 12 } })])]))
    expect(new Set(series.get('tails-a')!.v)).toEqual(new Set([13]))
    expect(magnitude({ g: 5, b: 12 })).toBe(13)
    expect(conductiveTo({ g: 1, b: 12 }, 13)).toBeCloseTo(4, 12)
  })
})

describe('a device', () => {
  const timer = load('timer', {
    habit: { kind: 'clock', windows: [[600, 660]], jitter: 0 },
    fault: { kind: 'when-on', mA: 16, spread: 0 },
  })

  it('stays closed just below its trip current and opens just above', () => {
    // 12 mA capacitive and 16 mA conductive: 20 mA.
    const circuits = [circuit('1', [timer], { standing: { g: 0, b: 12 } })]
    expect(simulate(planOf(circuits, { tripMa: 20.01 })).trips).toEqual([])
    const { truth } = simulate(planOf(circuits, { tripMa: 19.99 }))
    expect(truth.trips.length).toBeGreaterThanOrEqual(7)
    for (const trip of truth.trips) expect(trip.mA).toBeGreaterThanOrEqual(19.99)
  })

  it('carries nothing while open, and its loads do not run', () => {
    const circuits = [circuit('1', [timer, load('light')], { standing: { g: 0, b: 12 } })]
    const { truth, series } = simulate(planOf(circuits, { tripMa: 19 }))
    const tails = series.get('tails-a')!
    const lights = series.get('light-runs')!
    const amps = series.get('amps-a')!
    for (const { at, restoredAt } of truth.trips) {
      for (const { t, v } of [tails, lights, amps]) {
        const [a, b] = [lowerBound(t, at), lowerBound(t, restoredAt)]
        expect(v.slice(a, b).every((x) => x === 0)).toBe(true)
      }
    }
    expect(truth.trips.length).toBeGreaterThan(0)
  })

  it('is told of what it feeds up to the moment it opens, even when it opens at once', () => {
    const circuits = [circuit('1', [timer], { standing: { g: 0, b: 12 } })]
    const { truth, series } = simulate(planOf(circuits, { tripMa: 19 }))
    const { t, v } = series.get('timer-runs')!
    for (const { at } of truth.trips) expect(v[lowerBound(t, at) - 1]).toBe(1)
  })

  it('follows the load current of the group by a neutral fault', () => {
    const heater = load('heater', { amps: 10, habit: { kind: 'clock', windows: [[600, 720]], jitter: 0 } })
    const plan = planOf([circuit('1', [heater])])
    const [rcd] = plan.installation.rcds
    const installation = { ...plan.installation, rcds: [{ ...rcd!, neutralEarth: 0.9 }] }
    expect(new Set(simulate({ ...plan, installation }).series.get('tails-a')!.v)).toEqual(new Set([0, 9]))
  })

  it('keeps what leaks from the neutral when the line alone is opened', () => {
    const isolating = [{ of: 'circuit:1', from: START + DAY, to: START + 2 * DAY, told: true }]
    const made = (isolation: 'single-pole' | 'two-pole'): number => {
      const circuits = [circuit('1', [], { isolation, standing: { g: 0, b: 10 }, neutralShare: 0.2 })]
      const { t, v } = simulate(planOf(circuits, { isolating })).series.get('tails-a')!
      return v[lowerBound(t, START + 1.5 * DAY)]!
    }
    expect(made('single-pole')).toBe(2)
    expect(made('two-pole')).toBe(0)
  })
})

describe('wetness', () => {
  it('comes a lag after the rain, then decays by its time constant', () => {
    const rain = new Float64Array(96)
    rain[10] = 4
    const weather = { from: START, rain, temperature: rain, humidity: rain }
    const wet = wetness(weather, { lagHours: 3, decayHours: 6, soakMm: 1e6 }, START, START + 4 * DAY)
    const at = (hour: number): number => wet[hour * 60]!
    expect(wet[13 * 60 - 1]).toBe(0)
    expect(at(14)).toBeGreaterThan(0)
    // e^−1 six hours on; so far from saturation the part is linear, to 4 mm in 10⁶.
    expect(at(20) / at(14)).toBeCloseTo(Math.exp(-1), 5)
  })

  it('saturates', () => {
    const rain = new Float64Array(96).fill(50)
    const weather = { from: START, rain, temperature: rain, humidity: rain }
    const wet = wetness(weather, { lagHours: 0, decayHours: 6, soakMm: 2 }, START, START + 4 * DAY)
    expect(Math.max(...wet)).toBeLessThanOrEqual(1)
    expect(wet[48 * 60]).toBeCloseTo(1, 9)
  })
})
