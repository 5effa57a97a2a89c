import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { NOW_MS, type Rig } from './alerts-rig.ts'
import { HOUR, MINUTE, startWatchedSite, type WatchedSite } from './alerts-site.ts'

const T0 = NOW_MS

let watched: WatchedSite
let rig: Rig
let site: string
let set: WatchedSite['set']
let post: WatchedSite['post']
let live: WatchedSite['live']
let told: WatchedSite['told']
let matters: WatchedSite['matters']
beforeEach(async () => {
  watched = await startWatchedSite(true)
  ;({ rig, site, set, post, live, told, matters } = watched)
})
afterEach(async () => {
  expect(watched.rig.warnings).toEqual([])
  await watched.close()
})

describe('a level near the trip current', () => {
  it('is told once until it has clearly fallen', async () => {
    await set({ about: { silence: false } })
    await live(10, ['tails-a'], 12)
    expect(told()).toEqual([])
    // The ramp test says 23.5 mA; four fifths are 18.8.
    await live(6, ['tails-a'], 19.5)
    expect(told()).toMatchObject([{ kind: 'level', text: expect.stringContaining('19.5 mA') }])
    expect(told()[0]!.text).toContain('23.5 mA (by ramp test)')
    await live(6, ['tails-a'], 18)
    await live(6, ['tails-a'], 20)
    expect(told()).toHaveLength(1)
    await live(6, ['tails-a'], 14)
    expect(await matters('?open=true')).toEqual([])
    await live(6, ['tails-a'], 20)
    expect(told()).toHaveLength(2)
  })

  it('is not told for one kick among many readings', async () => {
    await set({ about: { silence: false } })
    await live(8, ['tails-a'], 12)
    await live(1, ['tails-a'], 22)
    await live(3, ['tails-a'], 12)
    expect(told()).toEqual([])
  })
})

describe('a remedy that is proven', () => {
  it('is told once', async () => {
    const day = 24 * HOUR
    const trips = Array.from({ length: 14 }, (_, i) => ({
      rcd: 'A',
      at: T0 - 60 * day + i * 2 * day,
      restoredAt: T0 - 60 * day + i * 2 * day + MINUTE,
    }))
    await rig.h.call('POST', `/sites/${site}/trips`, trips)
    const t = Array.from({ length: 60 * 24 }, (_, i) => T0 - 60 * day + i * HOUR)
    await rig.h.call('POST', `/sites/${site}/readings`, {
      blocks: [{ channel: 'tails-a', t, v: t.map((_, i) => 8 + (i % 3)) }],
    })
    await rig.h.call('POST', `/sites/${site}/remedies`, { at: T0 - 30 * day, of: 'load:mixer', done: 'unplugged' })
    await set({ about: { silence: false } })
    await rig.look()
    await rig.look()
    expect(told()).toMatchObject([{ kind: 'remedy', text: expect.stringContaining('the remedy is proven') }])
    rig.pass(HOUR)
    await post()
    await rig.look()
    await rig.look()
    expect(told()).toHaveLength(1)
  }, 60_000)
})

describe('a trip that only the log shows', () => {
  it('is told once, and not again when it is written down', async () => {
    const t = Array.from({ length: 12 * 360 }, (_, i) => T0 - 12 * HOUR + i * 10_000)
    const open = { from: T0 - 6 * HOUR, to: T0 - 4 * HOUR }
    const v = t.map((at, i) => (at >= open.from && at < open.to ? 0 : 9 + (i % 7) / 10))
    await rig.h.call('POST', `/sites/${site}/readings`, { blocks: [{ channel: 'tails-a', t, v }] })
    rig.setClock(T0 - 12 * HOUR)
    await set({ about: { silence: false } })
    rig.setClock(T0)
    await rig.look()
    await rig.look()
    expect(told()).toMatchObject([{ kind: 'trip', text: expect.stringContaining('nobody wrote it down') }])
    await watched.trip({ at: open.from, restoredAt: open.to })
    await rig.look()
    await rig.look()
    expect(told()).toHaveLength(1)
    expect(await matters()).toHaveLength(1)
  })
})
