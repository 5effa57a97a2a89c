import { encode } from 'cborg'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { type MqttIntake, openMqtt } from '../../server/mqtt/mqtt-intake.ts'
import { readTopicRights } from '../../server/mqtt/rights.ts'
import { type MqttTexts, readMqttSettings } from '../../server/mqtt/settings.ts'
import { LiveHub } from '../../server/plugins/live.ts'
import { type Store, StoreError } from '../../server/store/port.ts'
import { type Harness, startHarness } from './harness.ts'
import { type Broker, connectGateway, publishSurely, startBroker, until } from './mqtt-broker.ts'
import { TLS_CERT, TLS_KEY } from './tls-for-tests.ts'

const T0 = Date.UTC(2026, 8, 21)
const NONE = {
  sites: undefined,
  prefix: undefined,
  user: undefined,
  password: undefined,
  ca: undefined,
  clientId: undefined,
}
const columns = (...values: [number, number][]): string =>
  JSON.stringify({ blocks: [{ channel: 'tails-a', t: values.map(([t]) => t), v: values.map(([, v]) => v) }] })

describe('messages of a broker', () => {
  let h: Harness
  let broker: Broker
  let site: string
  let other: string
  const closers: (() => Promise<unknown>)[] = []
  const warnings: string[] = []

  beforeEach(async () => {
    h = await startHarness()
    broker = await startBroker()
    site = await h.makeSite()
    other = await h.makeSite()
    warnings.length = 0
  })
  afterEach(async () => {
    for (const close of closers.splice(0).reverse()) await close()
    await broker.close()
    await h.close()
  })

  function listen(texts: Partial<MqttTexts> = {}, store: Store = h.store): MqttIntake {
    const url = `mqtt://127.0.0.1:${broker.port}`
    const settings = readMqttSettings({ ...NONE, url, sites: `bakery=${site}`, ...texts }, 'leaktide-test')
    if ('why' in settings) throw new Error(settings.why)
    const live = new LiveHub()
    const intake = openMqtt({
      settings,
      inlet: {
        store,
        now: () => h.clock.now,
        onReadings: () => undefined,
        onRecords: (of, record) => live.tell(of, { kind: 'records', record }),
        onFault: (error) => warnings.push(String(error)),
      },
      warn: (text) => warnings.push(text),
      firstWaitMs: 20,
      mostWaitMs: 100,
    })
    closers.push(async () => {
      await intake.stop()
      live.close()
    })
    return intake
  }
  async function gateway(): Promise<(topic: string, payload: string | Buffer, retain?: boolean) => Promise<unknown>> {
    const client = await connectGateway(broker.port)
    closers.push(() => client.endAsync(true))
    return (topic, payload, retain = false) =>
      retain ? client.publishAsync(topic, payload, { qos: 1, retain }) : publishSurely(client, topic, payload)
  }
  const stored = async (of = site): Promise<[number, number][]> => {
    const { t, v } = await h.store.readings(of, 'tails-a', T0 - 1e10, T0 + 1e11)
    return [...t].map((at, i) => [at, v[i]!])
  }
  const refused = async (of = site): Promise<{ topic: string; why: string; count: number; sample: string }[]> =>
    (await h.call('GET', `/sites/${of}/mqtt`)).json().refused

  it('are taken as the same bodies over HTTP are: columns, SenML in JSON and CBOR, trips, states', async () => {
    const intake = listen()
    await until(() => intake.connected(), 'connected')
    const publish = await gateway()
    await publish('leaktide/bakery/readings', columns([T0, 12.9]))
    await publish('leaktide/bakery/readings', JSON.stringify([{ n: 'tails-a', u: 'A', bt: T0 / 1_000 + 1, v: 0.0131 }]))
    const cbor = encode([
      new Map<unknown, unknown>([
        [0, 'tails-a'],
        [6, T0 / 1_000 + 2],
        [2, 13.5],
      ]),
    ])
    await publish('leaktide/bakery/readings', Buffer.from(cbor))
    await publish('leaktide/bakery/trips', JSON.stringify({ rcd: 'A', at: '2026-09-21T02:14:05Z' }))
    await publish('leaktide/bakery/states', JSON.stringify({ changes: [{ of: 'circuit:7', at: T0, on: false }] }))
    await until(() => broker.acknowledged() >= 5, 'five acknowledged')
    expect(await stored()).toEqual([
      [T0, 12.9],
      [T0 + 1_000, 13.1],
      [T0 + 2_000, 13.5],
    ])
    expect((await h.call('GET', `/sites/${site}/trips`)).json().items).toMatchObject([{ recordedBy: 'MQTT', rcd: 'A' }])
    expect((await h.call('GET', `/sites/${site}/switchings`)).json().items).toHaveLength(1)
    expect(await refused()).toEqual([])
  })

  it('that are no good are refused, shown with their site and acknowledged; what follows is taken', async () => {
    const intake = listen()
    await until(() => intake.connected(), 'connected')
    const publish = await gateway()
    const bad = [
      '',
      '{',
      'no json',
      '[1]',
      '{"blocks":[{"channel":"ghost","t":[1],"v":[1]}]}',
      columns([1, 1]),
      JSON.stringify([{ n: 'ghost', v: 1 }]),
      '\u0000\u0001',
      Buffer.from([0x81, 0xff]),
      Buffer.from([0x7b, 0xff]),
      '[{"n":"tails-a","v":1,"must_":1}]',
      '{"__proto__":{"blocks":[]}}',
      'null',
      '"text"',
      '\ud83d\ude00'.repeat(300),
    ]
    for (const payload of bad) await publish('leaktide/bakery/readings', payload)
    await publish('leaktide/bakery/trips', JSON.stringify({ rcd: 'Z', at: T0 }))
    await publish('leaktide/bakery/trips', JSON.stringify({ rcd: 'Z', at: T0 }))
    await publish('leaktide/bakery/readings', columns([T0, 1], [5, 1], [T0 + 1, 99_999]))
    await until(() => broker.acknowledged() >= bad.length + 3, 'all acknowledged')
    expect(await stored()).toEqual([[T0, 1]])
    const list = await refused()
    expect(list[0]!.why).toContain('Some readings were refused')
    expect(list.find(({ topic }) => topic.endsWith('trips'))).toMatchObject({
      count: 2,
      why: expect.stringContaining('"Z"'),
    })
    expect(list.reduce((sum, { count }) => sum + count, 0)).toBe(bad.length + 3)
    expect(Math.max(...list.map(({ sample }) => [...sample].length))).toBeLessThanOrEqual(200)
    expect(warnings).toEqual([])
  })

  it('are listed as refused a hundred at most', async () => {
    for (let i = 0; i < 130; i++) {
      await h.store.messages.refuse(site, { topic: 't', why: `reason ${i}`, at: T0 + i, bytes: 1, sample: '' })
    }
    const list = await refused()
    expect(list).toHaveLength(100)
    expect(list[0]!.why).toBe('reason 129')
  })

  it('touch no site but the one that their topic was given', async () => {
    const intake = listen({ sites: `bakery=${site}:readings` })
    await until(() => intake.connected(), 'connected')
    const publish = await gateway()
    const sly = [
      `leaktide/${other}/readings`,
      `leaktide/${site}/readings`,
      'leaktide/bakery/trips',
      'leaktide/bakery/readings/x',
      `leaktide/bakery/../${other}/readings`,
      'leaktide//readings',
      'other/bakery/readings',
      `leaktide/bakery=${other}/readings`,
    ]
    for (const topic of sly) await publish(topic, columns([T0, 1]))
    await publish(
      'leaktide/bakery/readings',
      JSON.stringify({ site: other, blocks: [{ channel: 'tails-a', t: [T0 + 1], v: [2], site: other }] }),
    )
    await until(() => broker.acknowledged() >= 1, 'acknowledged')
    expect(await stored()).toEqual([[T0 + 1, 2]])
    expect(await stored(other)).toEqual([])
    expect((await h.call('GET', `/sites/${site}/trips`)).json().items).toEqual([])
  })

  it('of a subscription that the broker still remembers from earlier settings are dropped', async () => {
    const before = listen({ sites: `bakery=${site}, cellar=${other}` })
    await until(() => before.connected(), 'connected')
    const publish = await gateway()
    await publish('leaktide/cellar/readings', columns([T0, 1]))
    await until(() => broker.acknowledged() >= 1, 'acknowledged')
    await before.stop()
    await publish('leaktide/cellar/readings', columns([T0 + 1, 2]))
    const after = listen()
    await until(() => after.connected() && broker.acknowledged() >= 2, 'acknowledged again')
    expect(await stored(other)).toEqual([[T0, 1]])
  })

  it('by "*" reach every site under its own id, and none where there is none', async () => {
    const intake = listen({ sites: '*:readings', prefix: 'house/log' })
    await until(() => intake.connected(), 'connected')
    const publish = await gateway()
    await publish('house/log/nowhere/readings', columns([T0, 1]))
    await publish(`house/log/${other}/readings`, columns([T0, 1]))
    await publish(`house/log/${other}/trips`, JSON.stringify({ rcd: 'A', at: T0 }))
    await until(() => broker.acknowledged() >= 2, 'acknowledged')
    expect([await stored(other), await stored(site)]).toEqual([[[T0, 1]], []])
    expect(intake.topicsOf(other)).toEqual([`house/log/${other}/readings`])
  })

  it('for a site that the settings name and that does not exist are dropped with one warning', async () => {
    const intake = listen({ sites: 'bakery=nothing, *' })
    await until(() => intake.connected(), 'connected')
    const publish = await gateway()
    await publish('leaktide/bakery/readings', columns([T0, 1]))
    await publish('leaktide/bakery/readings', columns([T0, 1]))
    await publish('leaktide/nowhere/readings', columns([T0, 1]))
    await until(() => broker.acknowledged() >= 3, 'acknowledged')
    expect(warnings).toEqual([expect.stringContaining('"nothing" that does not exist')])
  })

  it('are acknowledged only when they are durable, and wait while the disk is full', async () => {
    let full = true
    const store = new Proxy(h.store, {
      get: (target, name) => {
        const value: unknown = Reflect.get(target, name, target)
        if (typeof value !== 'function') return value
        if (name === 'append' && full) return () => Promise.reject(new StoreError('disk_full', 'The disk is full.'))
        return value.bind(target)
      },
    })
    const intake = listen({}, store)
    await until(() => intake.connected(), 'connected')
    const publish = await gateway()
    await publish('leaktide/bakery/readings', columns([T0, 1]))
    await publish('leaktide/bakery/readings', columns([T0 + 1, 2]))
    await until(() => warnings.length > 0, 'a warning')
    expect(broker.acknowledged()).toBe(0)
    expect(warnings).toEqual([expect.stringContaining('disk is full')])
    full = false
    await until(() => broker.acknowledged() === 2, 'both acknowledged')
    expect(await stored()).toEqual([
      [T0, 1],
      [T0 + 1, 2],
    ])
  })

  it('that wait when the listener stops stay with the broker; the one in hand is finished first', async () => {
    let letGo = (): void => undefined
    const gate = new Promise<void>((resolve) => {
      letGo = resolve
    })
    const store = new Proxy(h.store, {
      get: (target, name) => {
        const value: unknown = Reflect.get(target, name, target)
        if (typeof value !== 'function') return value
        return name === 'append'
          ? (...args: Parameters<Store['append']>) => gate.then(() => target.append(...args))
          : value.bind(target)
      },
    })
    const intake = listen({}, store)
    await until(() => intake.connected(), 'connected')
    const publish = await gateway()
    const sent = Array.from({ length: 200 }, (_, i): [number, number] => [T0 + i, i])
    for (const one of sent) await publish('leaktide/bakery/readings', columns(one))
    const stopped = intake.stop()
    letGo()
    await stopped
    expect(await stored()).toEqual(sent.slice(0, 1))
    listen()
    await until(async () => (await stored()).length === sent.length, 'all stored')
    expect(await stored()).toEqual(sent)
  })

  it('survive a broker that breaks off and comes back, and a listener that goes and comes', async () => {
    let intake = listen()
    await until(() => intake.connected(), 'connected')
    const publish = await gateway()
    const sent: [number, number][] = []
    const sending: Promise<unknown>[] = []
    for (let i = 0; i < 300; i++) {
      sent.push([T0 + i * 1_000, i % 50])
      sending.push(publish('leaktide/bakery/readings', columns(sent.at(-1)!)))
      if (i % 60 === 30) {
        await broker.down()
        await broker.up()
      }
      if (i % 90 === 45) {
        await intake.stop()
        intake = listen()
      }
      if (i % 7 === 0) await new Promise((done) => setTimeout(done, 3))
    }
    await Promise.all(sending)
    await until(async () => (await stored()).length === sent.length, 'all stored', 25_000)
    expect(await stored()).toEqual(sent)
    expect(await refused()).toEqual([])
  })

  it('with times relative to now mean the moment they first came, also when delivered again', async () => {
    const digest = new Uint8Array(32).fill(7)
    expect(await h.store.messages.arrivedAt(digest, 1_000, false)).toBe(1_000)
    expect(await h.store.messages.arrivedAt(digest, 9_000, true)).toBe(1_000)
    // The same bytes anew are another message.
    expect(await h.store.messages.arrivedAt(digest, 9_500, false)).toBe(9_500)
    expect(await h.store.messages.arrivedAt(new Uint8Array(32), 9_500, true)).toBe(9_500)
  })

  it('that the broker retained are refused when their times count from now', async () => {
    const publish = await gateway()
    await publish('leaktide/bakery/readings', JSON.stringify([{ n: 'tails-a', v: 5 }]), true)
    const intake = listen()
    await until(async () => intake.connected() && (await refused()).length > 0, 'refused')
    expect((await refused())[0]!.why).toContain('retained')
    expect(await stored()).toEqual([])
  })

  it('come over TLS with user and password, and the password is in no warning', async () => {
    const secure = await startBroker({
      tls: { key: TLS_KEY, cert: TLS_CERT },
      authenticate: (user, password) => user === 'leaktide' && password === 'right-password',
    })
    closers.push(() => secure.close())
    const url = `mqtts://localhost:${secure.port}`
    const wrong = listen({ url, ca: TLS_CERT, user: 'leaktide', password: 'wrong-password', clientId: 'a' })
    const untrusting = listen({ url, user: 'leaktide', password: 'right-password', clientId: 'b' })
    const right = listen({ url, ca: TLS_CERT, user: 'leaktide', password: 'right-password', clientId: 'c' })
    await until(() => right.connected(), 'connected')
    await until(() => warnings.length >= 2, 'two warnings')
    expect([wrong.connected(), untrusting.connected()]).toEqual([false, false])
    expect(warnings.join('\n')).not.toContain('password')
  })
})

describe('the settings of a broker', () => {
  it.each([
    [{ url: 'http://broker' }, 'MQTT_URL'],
    [{ url: 'mqtt://user:pw@broker' }, 'without a user'],
    [{ sites: '' }, 'no site is named'],
    [{ sites: 'a=b=c' }, 'NAME=SITE'],
    [{ sites: 'a=b:everything' }, 'readings, trips, states'],
    [{ sites: 'a=b, a=c' }, 'stands there twice'],
    [{ sites: 'a/b=c' }, 'NAME=SITE'],
    [{ sites: '#' }, 'NAME=SITE'],
    [{ sites: 'a', prefix: 'x/#' }, 'MQTT_PREFIX'],
    [{ sites: 'a', clientId: 'x y' }, 'MQTT_CLIENT'],
    [{ sites: 'a', password: 'p' }, 'MQTT_USER'],
  ])('%j are refused in one sentence', (texts, sentence) => {
    const read = readMqttSettings({ ...NONE, url: 'mqtt://broker', ...texts }, 'usual')
    expect(read).toEqual({ why: expect.stringContaining(sentence) })
  })

  it('allow a topic what it was given and nothing else', () => {
    const rights = readTopicRights('a=s1:readings+trips, s2, *:states', 'p')
    if ('why' in rights) throw new Error(rights.why)
    expect(rights.rightOf('p/a/readings')).toEqual({ site: 's1', kind: 'readings', named: true })
    expect(rights.rightOf('p/s2/trips')).toEqual({ site: 's2', kind: 'trips', named: true })
    expect(rights.rightOf('p/s3/states')).toEqual({ site: 's3', kind: 'states', named: false })
    for (const topic of ['p/s3/readings', 'p/a/readings/', 'p/+/states', 'p/#', 'q/a/readings', '', 'p/s3/x/states']) {
      expect([topic, rights.rightOf(topic)]).toEqual([topic, undefined])
    }
    expect(rights.topicsOf('s1')).toEqual(['p/a/readings', 'p/a/trips', 'p/s1/states'])
  })
})
