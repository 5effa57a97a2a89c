import type { SiteTest } from '../contract/records.ts'
import type { Weather } from './weather.ts'

const MINUTE = 60_000
const HOUR = 60 * MINUTE

/** A week of its season, hour by hour, with rain on the second and the sixth day. */
export function bakeryWeather(startMs: number): Weather {
  const from = startMs - 24 * HOUR
  const hours = 9 * 24
  const rain = new Float64Array(hours)
  const showers: readonly (readonly [number, readonly number[]])[] = [
    [24 + 24 + 13, [0.4, 1.8, 2.6, 0.9, 0, 0.3]],
    [24 + 5 * 24 + 5, [0.2, 0.7, 1.1, 2.2, 3.1, 1.4, 0.6, 0.2]],
  ]
  for (const [first, depths] of showers) for (const [k, mm] of depths.entries()) rain[first + k] = mm
  const wave = (h: number): number => Math.cos((2 * Math.PI * ((h % 24) - 15)) / 24)
  const temperature = Float64Array.from(rain, (mm, h) => {
    const celsius = 12 + 5 * wave(h) * (mm > 0 ? 0.4 : 1) + 1.5 * Math.sin(h / 31)
    return Math.round(celsius * 10) / 10
  })
  const humidity = Float64Array.from(rain, (mm, h) => Math.round(Math.min(98, 71 - 14 * wave(h) + (mm > 0 ? 18 : 0))))
  return { from, rain, temperature, humidity }
}

/** What the electrician measured the afternoon before: trip currents, a clamp survey, insulation. */
export function bakeryTests(startMs: number): SiteTest[] {
  const at = startMs - 10 * HOUR
  const insulation = (
    of: string,
    megohms: number,
    more: Partial<SiteTest & { kind: 'insulation' }> = {},
  ): SiteTest => ({
    kind: 'insulation',
    of,
    between: 'live-earth',
    testVolts: 500,
    megohms,
    atLeast: false,
    loadsConnected: false,
    surgePartsConnected: false,
    at,
    ...more,
  })
  return [
    { kind: 'ramp', rcd: 'A', tripMa: 23.1, at },
    { kind: 'ramp', rcd: 'B', tripMa: 24.6, at: at + 4 * MINUTE },
    { kind: 'clamp', rcd: 'A', ma: 9.8, off: [], at: at + 10 * MINUTE, note: 'Nothing baking, no defrost' },
    ...survey(at + 12 * MINUTE),
    insulation('circuit:3', 4.6, { note: 'Dry: tested between defrosts' }),
    insulation('circuit:7', 999, { atLeast: true, loadsConnected: true }),
    insulation('circuit:13', 2.2),
  ]
}

/** One circuit off at a time. */
function survey(at: number): SiteTest[] {
  const read = { '1': 7.8, '2': 7.8, '3': 7.2, '4': 8.8, '7': 7.7 }
  return Object.entries(read).map(([circuit, ma], i) => {
    return { kind: 'clamp', rcd: 'A', ma, off: [`circuit:${circuit}`], at: at + 2 * i * MINUTE }
  })
}
