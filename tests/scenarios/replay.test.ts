// Real loads and real weather with a leak laid over them, posted through the real API: the planted cause must come first.
// Contains information from the tracebase data set, which is made available at http://www.tracebase.org under the Open
// Database License (ODbL). Weather: fixtures/data/weather-c/PROVENANCE.md.
import type { AddressInfo } from 'node:net'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Findings } from '../../core/contract/findings.ts'
import { overlay, type Planted, type RealSite } from '../../core/simulate/overlay.ts'
import { postSimulated } from '../../server/demo/post-simulated.ts'
import { type Harness, OWNER_KEY, startHarness } from '../server/harness.ts'
import { realLoads, realWeather } from './real-data.ts'

let harness: Harness
let url: string

beforeAll(async () => {
  harness = await startHarness()
  await harness.app.listen({ host: '127.0.0.1', port: 0 })
  url = `http://127.0.0.1:${(harness.app.server.address() as AddressInfo).port}`
})
afterAll(() => harness.close())

function siteOf(house: 'house-b' | 'house-c'): RealSite {
  const { loads, from, to } = realLoads(house)
  const place = { timeZone: 'Europe/Berlin', latitude: 49.87, longitude: 8.65 }
  return { name: house, ...place, loads, from, to, weather: realWeather(from) }
}

describe('a cause planted in real records', () => {
  it.each<['house-b' | 'house-c', Planted, number]>([
    ['house-b', { by: 'load', ref: 'coffee-maker', fault: 'when-on' }, 1],
    ['house-b', { by: 'load', ref: 'fridge', fault: 'warming' }, 2],
    ['house-b', { by: 'load', ref: 'kettle', fault: 'when-on' }, 3],
    ['house-b', { by: 'rain' }, 4],
    ['house-c', { by: 'load', ref: 'microwave', fault: 'when-on' }, 5],
    ['house-c', { by: 'load', ref: 'fridge-a', fault: 'in-run' }, 6],
  ])('%s, %o comes first', async (house, planted, seed) => {
    const simulated = overlay(siteOf(house), planted, seed)
    expect(simulated.truth.trips.length).toBeGreaterThanOrEqual(5)
    const site = await postSimulated({ url, ownerKey: OWNER_KEY }, simulated)
    const query = `from=${simulated.from}&to=${simulated.to}`
    const response = await fetch(`${url}/api/sites/${site}/rcds/A/findings?${query}`, {
      headers: { authorization: `Bearer ${OWNER_KEY}` },
    })
    expect(response.status).toBe(200)
    const { suspects } = (await response.json()) as Findings
    const told = suspects.slice(0, 4).map(({ of, probability, grade }) => `${of} ${probability} ${grade}`)
    expect(suspects[0]?.of, told.join(', ')).toBe(simulated.truth.causes[0])
    const falselySure = suspects.filter(({ of, grade }) => grade === 'strong' && of !== simulated.truth.causes[0])
    expect(falselySure, told.join(', ')).toEqual([])
  })
})
