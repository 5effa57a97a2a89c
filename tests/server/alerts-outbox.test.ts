import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { signature } from '../../server/alerts/webhook.ts'
import { NOW_MS, type Receiver, type Rig, SECRET, startReceiver } from './alerts-rig.ts'
import { HOUR, MINUTE, startWatchedSite, type WatchedSite } from './alerts-site.ts'

const T0 = NOW_MS

let watched: WatchedSite
let rig: Rig
let receiver: Receiver
let site: string
let set: WatchedSite['set']
let post: WatchedSite['post']
let live: WatchedSite['live']
let told: WatchedSite['told']
let matters: WatchedSite['matters']
let deliveries: WatchedSite['deliveries']
beforeEach(async () => {
  watched = await startWatchedSite()
  ;({ rig, receiver, site, set, post, live, told, matters, deliveries } = watched)
})
afterEach(async () => {
  expect(watched.rig.warnings).toEqual([])
  await watched.close()
})

describe('quiet hours', () => {
  // 12:00 UTC is 14:00 in Vienna in September.
  const quiet = { from: '13:00', to: '15:00' }

  it("by the site's own clock hold messages back, and let them go when they end", async () => {
    await set({ quiet })
    await rig.h.call('POST', `/sites/${site}/trips`, { rcd: 'A', at: T0 - MINUTE })
    await rig.look()
    expect(told()).toEqual([])
    expect(await deliveries()).toMatchObject([{ state: 'waiting', attempts: 0 }])
    rig.pass(HOUR - 1)
    await rig.look()
    expect(told()).toEqual([])
    rig.pass(1)
    await rig.look()
    expect(told()).toHaveLength(1)
  })

  it('that run past midnight do so', async () => {
    await set({ quiet: { from: '14:30', to: '06:00' } })
    rig.pass(HOUR)
    await rig.h.call('POST', `/sites/${site}/trips`, { rcd: 'A', at: T0 })
    await rig.look()
    rig.pass(14 * HOUR)
    await rig.look()
    expect(told()).toEqual([])
    rig.pass(2 * HOUR)
    await rig.look()
    expect(told()).toHaveLength(1)
  })

  it('let a trip through where that is set, and nothing else', async () => {
    await set({ quiet: { ...quiet, tripsBreakThrough: true } })
    await live(4)
    rig.pass(10 * MINUTE)
    await rig.h.call('POST', `/sites/${site}/trips`, { rcd: 'A', at: T0 })
    await rig.look()
    expect(told()).toMatchObject([{ kind: 'trip' }])
  })

  it('a message that waited says when its matter was over', async () => {
    await set({ quiet })
    await live(4)
    rig.pass(10 * MINUTE)
    await rig.look()
    await post()
    await rig.look()
    rig.pass(HOUR)
    await rig.look()
    expect(told()[0]!.text).toMatch(/It was over at 2026-09-22 14:14 \(Europe\/Vienna\)/)
  })
})

describe('the outbox', () => {
  const trip = (at = T0): Promise<unknown> => watched.trip({ at })

  it('signs what it sends by time and body', async () => {
    await set()
    await trip()
    await rig.look()
    const { headers, body } = receiver.calls[0]!
    const timestamp = String(headers['leaktide-timestamp'])
    expect(Number(timestamp)).toBe(Math.floor(rig.h.clock.now / 1_000))
    expect(headers['leaktide-signature']).toBe(`v1=${signature(SECRET, timestamp, body)}`)
    expect(headers['leaktide-message']).toBe(told()[0]!.message)
    expect(JSON.parse(body)).toMatchObject({ site: { id: site, name: 'Village bakery' }, kind: 'trip' })
  })

  it('tries again after waits that double, over restarts, until it is taken; then never again', async () => {
    await set()
    receiver.answer = (response) => response.writeHead(503).end('later')
    await trip()
    await rig.look()
    const waits: number[] = []
    for (let i = 0; i < 5; i++) {
      const [one] = await deliveries()
      expect(one).toMatchObject({ state: 'waiting', attempts: i + 1, error: 'answered 503' })
      const wait = Date.parse(one!.nextAt!) - rig.h.clock.now
      waits.push(wait / 1_000)
      rig.pass(wait - 1)
      await rig.look()
      expect(receiver.calls).toHaveLength(i + 1)
      if (i === 2) await rig.restart()
      rig.pass(1)
      await rig.look()
      expect(receiver.calls).toHaveLength(i + 2)
    }
    expect(waits).toEqual([30, 60, 120, 240, 480])
    receiver.answer = (response) => response.writeHead(200).end()
    rig.pass(24 * HOUR)
    await rig.restart()
    await rig.look()
    await rig.look()
    expect(await deliveries()).toMatchObject([{ state: 'sent', error: null, nextAt: null }])
    rig.pass(24 * HOUR)
    await rig.look()
    expect(receiver.calls).toHaveLength(7)
    expect(new Set(receiver.calls.map(({ headers }) => headers['leaktide-message'])).size).toBe(1)
  })

  it('does not wait for ever for a clock that was set back', async () => {
    await set()
    receiver.answer = (response) => response.writeHead(500).end()
    rig.setClock(T0 + 365 * 24 * HOUR)
    await trip(T0 + 365 * 24 * HOUR)
    await rig.look()
    expect(receiver.calls).toHaveLength(1)
    rig.setClock(T0)
    receiver.answer = (response) => response.writeHead(200).end()
    await rig.look()
    expect(await deliveries()).toMatchObject([{ state: 'sent', attempts: 2 }])
  })

  it('gives up on a place that was taken out of the settings', async () => {
    await set()
    receiver.answer = (response) => response.writeHead(500).end()
    await trip()
    await rig.look()
    await rig.h.call('PUT', `/sites/${site}/alerts`, {})
    rig.pass(HOUR)
    await rig.look()
    expect(await deliveries()).toMatchObject([{ state: 'given-up' }])
    expect(receiver.calls).toHaveLength(1)
  })

  it('gives up at last on a place that never takes it, and says so', async () => {
    await set()
    receiver.answer = (response) => response.writeHead(500).end()
    await trip()
    for (let i = 0; i < 45; i++) {
      await rig.look()
      rig.pass(6 * HOUR)
    }
    expect(await deliveries()).toMatchObject([{ state: 'given-up', attempts: 38, nextAt: null }])
    expect(receiver.calls).toHaveLength(38)
  })

  it('is not held up by a place that does not answer', async () => {
    const second = await rig.h.makeSite()
    const other = await startReceiver()
    await set()
    await rig.h.call('PUT', `/sites/${second}/alerts`, { webhook: { url: other.url, secret: SECRET } })
    let letGo = (): void => undefined
    receiver.answer = (response) => {
      letGo = () => response.writeHead(200).end()
    }
    await trip()
    await rig.h.call('POST', `/sites/${second}/trips`, { rcd: 'A', at: T0 })
    await rig.alerts().look()
    while (other.calls.length + receiver.calls.length < 2) await new Promise((done) => setTimeout(done, 5))
    letGo()
    await rig.alerts().settled()
    expect(receiver.calls).toHaveLength(1)
    await other.close()
  })

  it('is not flooded by whoever writes trips down; what waits is told together', async () => {
    await set()
    const trips = 60
    for (let i = 0; i < trips; i++) {
      const at = T0 - 24 * HOUR + i * 10_000
      await watched.trip({ at, restoredAt: at + 1_000 })
      rig.pass(1_000)
      await rig.look()
    }
    expect(told()).toHaveLength(20)
    rig.pass(HOUR)
    await rig.look()
    expect(told()).toHaveLength(21)
    expect(new Set(told().flatMap((message) => message.matters.map(({ id }) => id))).size).toBe(trips)
    rig.pass(HOUR)
    await rig.look()
    expect(told()).toHaveLength(21)
  })

  it('tells the kinds that are wanted and no others; all are noticed', async () => {
    await set({ about: { silence: false, trip: false, level: false, remedy: false } })
    await live(4)
    rig.pass(HOUR)
    await trip()
    await rig.look()
    expect(told()).toEqual([])
    expect((await matters()).map(({ kind }) => kind).sort()).toEqual(['silence', 'trip'])
  })
})
