import { setTimeout as sleep } from 'node:timers/promises'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type Broker, connectGateway, startBroker, until } from '../server/mqtt-broker.ts'
import { BAKEHOUSE } from './bakehouse.ts'
import { Client } from './client.ts'
import { buildServer, type ServerProcess, startServer, temporaryFolder } from './server-process.ts'

const ROUNDS = 4
const T0 = Date.UTC(2026, 8, 21)

describe('a server that is killed while a broker delivers', () => {
  const folder = temporaryFolder()
  let broker: Broker
  let server: ServerProcess
  beforeAll(async () => {
    await buildServer()
    broker = await startBroker()
  })
  afterAll(async () => {
    expect(await server.end('SIGTERM')).toMatchObject({ code: 0 })
    await broker.close()
    folder.remove()
  })

  it('finds every message again, loses none and doubles none', async () => {
    const env = { LEAKTIDE_MQTT_URL: `mqtt://127.0.0.1:${broker.port}`, LEAKTIDE_MQTT_SITES: '*' }
    const listens = async (): Promise<ServerProcess> => {
      const started = await startServer(folder.path, env)
      await until(() => broker.aedes.connectedClients >= 1, 'the server at the broker')
      return started
    }
    server = await listens()
    const made = await new Client(server.url).post<{ id: string }>('/sites', BAKEHOUSE)
    const site = made!.body.id
    await until(
      async () => (await new Client(server.url).get<{ connected: boolean }>(`/sites/${site}/mqtt`)).connected,
      'listening',
    )
    const gateway = await connectGateway(broker.port)
    const sent: [number, number][] = []
    let sending = true
    const publishing = (async () => {
      while (sending) {
        const at = T0 + sent.length * 1_000
        sent.push([at, sent.length % 40])
        const body = JSON.stringify({ blocks: [{ channel: 'tails-a', t: [at], v: [sent.at(-1)![1]] }] })
        await gateway.publishAsync(`leaktide/${site}/readings`, body, { qos: 1 })
        // No faster than a broker that keeps all in memory can give it out again.
        if (sent.length % 5 === 0) await sleep(4)
        if (sent.length % 20 === 0) {
          const trip = JSON.stringify({ rcd: 'A', at })
          await gateway.publishAsync(`leaktide/${site}/trips`, trip, { qos: 1 })
        }
      }
    })()
    for (let round = 0; round < ROUNDS; round++) {
      await sleep(150)
      expect((await server.end('SIGKILL')).signal).toBe('SIGKILL')
      await sleep(50)
      server = await listens()
    }
    sending = false
    await publishing
    const client = new Client(server.url)
    await until(async () => (await client.readings(site, 'tails-a')).length >= sent.length, 'all readings')
    expect(await client.readings(site, 'tails-a')).toEqual(sent)
    const trips = Math.floor(sent.length / 20)
    await until(async () => (await client.list(`/sites/${site}/trips`)).length >= trips, 'all trips')
    expect(await client.list(`/sites/${site}/trips`)).toHaveLength(trips)
    await gateway.endAsync(true)
  }, 60_000)
})
