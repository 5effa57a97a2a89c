import type { SiteSheetIn } from '../../core/contract/index.ts'

/** The board of a small bakehouse, as much of it as these tests need. */
export const BAKEHOUSE: SiteSheetIn = {
  name: 'Bakehouse',
  timeZone: 'Europe/Vienna',
  latitude: 47.3,
  longitude: 13.4,
  rcds: [
    {
      ref: 'A',
      label: 'Bakehouse and cold room',
      ratedMa: 30,
      rampTripMa: 23.5,
      circuits: [
        { ref: '3', label: 'Walk-in freezer', loads: [{ ref: 'defrost', label: 'Defrost heater' }] },
        { ref: '7', label: 'Bakehouse sockets', loads: [{ ref: 'mixer', label: 'Mixer' }] },
      ],
    },
  ],
  channels: [
    { ref: 'tails-a', quantity: 'leakage', rcd: 'A', resolutionMa: 0.01 },
    { ref: 'leak-7', quantity: 'leakage', circuit: '7', resolutionMa: 0.01 },
    { ref: 'defrost-runs', quantity: 'running', load: 'defrost' },
    { ref: 'mixer-runs', quantity: 'running', load: 'mixer' },
  ],
}

/** Midnight in the bakehouse, a Monday. */
export const START_MS: number = Date.UTC(2026, 8, 20, 22)

/** A small generator of even numbers in [0, 1) from a seed, so that a failing run can be had again. */
export function seeded(seed: number): () => number {
  let state = seed >>> 0
  return () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0
    return state / 2 ** 32
  }
}
