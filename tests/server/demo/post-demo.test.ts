import type { AddressInfo } from 'node:net'
import { afterAll, beforeAll, expect, it } from 'vitest'
import type { Findings } from '../../../core/contract/findings.ts'
import { bakeryWeek } from '../../../core/simulate/bakery.ts'
import { postDemo } from '../../../server/demo/post-demo.ts'
import { type Harness, OWNER_KEY, startHarness } from '../harness.ts'

const START = Date.UTC(2026, 8, 13, 22)

let harness: Harness
let url: string

beforeAll(async () => {
  harness = await startHarness()
  await harness.app.listen({ host: '127.0.0.1', port: 0 })
  url = `http://127.0.0.1:${(harness.app.server.address() as AddressInfo).port}`
})
afterAll(() => harness.close())

it('posts the whole week, and the answer is the defrost heater, not the mixer', async () => {
  const lines: string[] = []
  const { site, rcd } = await postDemo({ url, ownerKey: OWNER_KEY, startMs: START, onProgress: (l) => lines.push(l) })
  const week = bakeryWeek(START)
  for (const { channel, count } of await harness.store.extents(site)) {
    expect(count, channel).toBe(week.series.get(channel)!.t.length)
  }
  const kept = async (kind: 'trip' | 'switching' | 'test'): Promise<number> =>
    (await harness.store.records(site, kind, { limit: 100 })).items.length
  expect(await kept('trip')).toBe(week.trips.length)
  expect(await kept('switching')).toBe(week.switchings.length)
  expect(await kept('test')).toBe(week.tests.length)
  expect(lines.length).toBeGreaterThan(1)

  const answer = await harness.call('GET', `/sites/${site}/rcds/${rcd}/findings`)
  const { suspects } = answer.json<Findings>()
  expect(suspects[0]?.of).toBe('load:defrost')
  expect(suspects.find(({ of }) => of === 'load:mixer')?.grade).not.toBe('strong')
})

it('says what the server refused', async () => {
  await expect(postDemo({ url, ownerKey: 'not the owner', startMs: START })).rejects.toThrow(/answered 401/)
})
