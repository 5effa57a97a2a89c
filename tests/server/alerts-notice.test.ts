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
let trip: WatchedSite['trip']
let told: WatchedSite['told']
let matters: WatchedSite['matters']
beforeEach(async () => {
  watched = await startWatchedSite()
  ;({ rig, site, set, post, live, trip, told, matters } = watched)
})
afterEach(async () => {
  expect(watched.rig.warnings).toEqual([])
  await watched.close()
})

describe('a logger that stops', () => {
  it('is noticed within three of its intervals, told once, and over when it is back', async () => {
    await set()
    await live(5)
    expect(await matters()).toEqual([])
    // The last post is a minute old here.
    rig.pass(2 * MINUTE - 1)
    await rig.look()
    expect(told()).toMatchObject([{ kind: 'silence', text: expect.stringContaining('channel tails-a') }])
    expect(told()[0]!.text).toContain('every 60 s')
    for (let i = 0; i < 5; i++) {
      rig.pass(HOUR)
      await rig.look()
    }
    expect(told()).toHaveLength(1)
    expect(await matters('?open=true')).toMatchObject([
      { kind: 'silence', closedAt: null, deliveries: [{ state: 'sent' }] },
    ])
    await post()
    await rig.look()
    expect(await matters('?open=true')).toEqual([])
    // The next silence is a matter of its own.
    await live(5)
    rig.pass(HOUR)
    await rig.look()
    expect(told()).toHaveLength(2)
  })

  it('with all of its channels is one message', async () => {
    await set()
    await live(4, ['tails-a', 'leak-7', 'amps-7'])
    rig.pass(10 * MINUTE)
    await rig.look()
    expect(told()).toHaveLength(1)
    expect(told()[0]!.matters).toHaveLength(3)
  })

  it('is not thought silent between the batches it posts every ten minutes', async () => {
    await set()
    for (let batch = 0; batch < 6; batch++) {
      const t = Array.from({ length: 600 }, (_, i) => rig.h.clock.now - (600 - i) * 1_000)
      await rig.h.call('POST', `/sites/${site}/readings`, { blocks: [{ channel: 'tails-a', t, v: t.map(() => 9) }] })
      for (let minute = 0; minute < 10; minute++) {
        rig.pass(MINUTE)
        await rig.look()
      }
    }
    expect(told()).toEqual([])
    rig.pass(16 * MINUTE)
    await rig.look()
    expect(told()).toHaveLength(1)
  })

  it('is alive while it posts old readings, or the same ones again, or with a clock that is hours off', async () => {
    await set()
    for (let i = 0; i < 20; i++) {
      await post(['tails-a'], 10, T0 - 9 * HOUR + (i % 3))
      rig.pass(MINUTE)
      await rig.look()
    }
    expect(told()).toEqual([])
  })

  it('that posts only when something changes is not waited for, unless the settings say how often it posts', async () => {
    await set()
    for (const minutes of [1, 60, 2, 300, 1, 5, 90, 1, 1, 240]) {
      await post(['mixer-runs'], 1)
      rig.pass(minutes * MINUTE)
    }
    await post(['mixer-runs'], 0)
    rig.pass(48 * HOUR)
    await rig.look()
    expect(told()).toEqual([])
    await set({ silence: { everySeconds: { 'mixer-runs': 600 } } })
    await rig.look()
    expect(told()).toMatchObject([{ kind: 'silence' }])
  })

  it('says by itself how often it posts ("ut" of SenML)', async () => {
    await set()
    await rig.h.call('POST', `/sites/${site}/readings`, [{ n: 'tails-a', v: 10, ut: 120 }], {
      headers: { 'content-type': 'application/senml+json' },
    })
    rig.pass(4 * MINUTE)
    await rig.look()
    expect(told()).toEqual([])
    rig.pass(2 * MINUTE)
    await rig.look()
    expect(told()).toHaveLength(1)
  })

  it('is not missed or doubled by a clock that is set, forward or back', async () => {
    await set()
    await live(5)
    for (const ms of [T0 + 30 * 24 * HOUR, T0 - 24 * HOUR, T0]) {
      rig.setClock(ms)
      await rig.look()
      expect(told()).toEqual([])
    }
    rig.setClock(T0 - 48 * HOUR)
    rig.pass(3 * MINUTE)
    await rig.look()
    expect(told()).toHaveLength(1)
    rig.setClock(T0 + HOUR)
    await rig.look()
    expect(told()).toHaveLength(1)
  })

  it('stays one matter over a restart, and is noticed after one', async () => {
    await set()
    await live(6, ['tails-a'])
    await live(6, ['tails-a', 'rh'])
    rig.pass(5 * MINUTE)
    await rig.look()
    expect(told()).toHaveLength(1)
    await rig.restart()
    await rig.look()
    rig.pass(10 * MINUTE)
    await rig.look()
    expect(told()).toHaveLength(1)
    await post(['tails-a'])
    await rig.look()
    expect(await matters('?open=true')).toMatchObject([{ text: expect.stringContaining('channel rh') }])
    await rig.restart()
    rig.pass(2 * MINUTE)
    await rig.look()
    expect(told()).toHaveLength(1)
    rig.pass(MINUTE)
    await rig.look()
    expect(told()).toHaveLength(2)
    expect(told()[1]!.text).toContain('since the server started')
  })

  it('is no longer waited for once its channel left the sheet', async () => {
    await set()
    await live(4)
    rig.pass(HOUR)
    await rig.look()
    expect(await matters('?open=true')).toHaveLength(1)
    await rig.h.call('PATCH', `/sites/${site}`, { channels: [] })
    await rig.look()
    expect(await matters('?open=true')).toEqual([])
  })
})

describe('a trip', () => {
  it('is told at once, once, though two people write it down', async () => {
    await set()
    await trip({ at: T0 - MINUTE, note: 'dark\nagain' })
    await rig.alerts().settled()
    await new Promise((done) => setImmediate(done))
    await rig.look()
    expect(told()).toMatchObject([{ kind: 'trip', text: expect.stringContaining('RCD A (Bakehouse) tripped') }])
    expect(told()[0]!.text).toContain('Note: dark again')
    await trip({ at: T0 - MINUTE, note: 'dark\nagain' })
    await trip({ after: T0 - HOUR, before: T0, note: 'found it off' })
    await rig.look()
    expect(told()).toHaveLength(1)
    await trip({ rcd: 'B', at: T0 - MINUTE })
    await trip({ at: T0 - 3 * HOUR, restoredAt: T0 - 2 * HOUR })
    await rig.look()
    expect(told().flatMap((message) => message.matters)).toHaveLength(3)
  })

  it('of long ago, or from before the alerts were set up, is history', async () => {
    await trip({ at: T0 - HOUR })
    rig.pass(MINUTE)
    await set()
    await trip({ at: T0 - 72 * HOUR })
    await rig.look()
    expect(told()).toEqual([])
  })

  it('is over when the supply is back, or after a day', async () => {
    await set()
    await trip({ at: T0 })
    await trip({ rcd: 'B', at: T0 })
    await rig.look()
    expect(await matters('?open=true')).toHaveLength(2)
    const { items } = (await rig.h.call('GET', `/sites/${site}/trips`)).json()
    await rig.h.call('PATCH', `/sites/${site}/trips/${items[0].id}`, { restoredAt: T0 + HOUR })
    rig.pass(2 * HOUR)
    await rig.look()
    expect(await matters('?open=true')).toHaveLength(1)
    rig.pass(25 * HOUR)
    await rig.look()
    expect(await matters('?open=true')).toEqual([])
    expect(told().flatMap((message) => message.matters)).toHaveLength(2)
  })

  it('is told although the clock was set back since the settings were made', async () => {
    await set()
    rig.setClock(T0 - 24 * HOUR)
    await trip({ at: T0 - 24 * HOUR - MINUTE })
    await rig.look()
    expect(told()).toHaveLength(1)
  })
})
