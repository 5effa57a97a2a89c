import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type Receiver, startReceiver } from '../server/alerts-rig.ts'
import { until } from '../server/mqtt-broker.ts'
import { BAKEHOUSE } from './bakehouse.ts'
import { buildServer, OWNER_KEY, type ServerProcess, startServer, temporaryFolder } from './server-process.ts'

const ROUNDS = 2

describe('a server that is killed while it tells of trips', () => {
  const folder = temporaryFolder()
  let server: ServerProcess
  let receiver: Receiver
  beforeAll(async () => {
    await buildServer()
    receiver = await startReceiver()
  })
  afterAll(async () => {
    expect(await server.end('SIGTERM')).toMatchObject({ code: 0 })
    await receiver.close()
    folder.remove()
  })

  async function ask(method: string, path: string, body?: unknown): Promise<unknown> {
    const answer = await fetch(`${server.url}/api${path}`, {
      method,
      headers: { authorization: `Bearer ${OWNER_KEY}`, 'content-type': 'application/json' },
      ...(body === undefined ? {} : { body: JSON.stringify(body) }),
    })
    if (!answer.ok) throw new Error(`${method} ${path} answered ${answer.status}: ${await answer.text()}`)
    return answer.json()
  }

  it('loses no message, and what is told twice carries the same id', async () => {
    const env = { LEAKTIDE_WEBHOOK_HOSTS: '127.0.0.1' }
    server = await startServer(folder.path, env)
    const { id: site } = (await ask('POST', '/sites', BAKEHOUSE)) as { id: string }
    const webhook = { url: receiver.url, secret: 'a-secret-of-the-fault-tests' }
    const about = { silence: false, level: false, remedy: false }
    await ask('PUT', `/sites/${site}/alerts`, { webhook, about })
    const told = new Map<string, Set<string>>()
    let trips = 0
    for (let round = 0; round < ROUNDS; round++) {
      // Taken, but the answer never comes: the worst moment to be killed.
      const before = receiver.calls.length
      receiver.answer = () => undefined
      for (let i = 0; i < 3; i++)
        await ask('POST', `/sites/${site}/trips`, { rcd: 'A', at: Date.now() - trips++ * 3_600_000 })
      await until(() => receiver.calls.length > before, 'a call')
      expect((await server.end('SIGKILL')).signal).toBe('SIGKILL')
      receiver.answer = (response) => response.writeHead(204).end()
      server = await startServer(folder.path, env)
      await until(async () => {
        const { items } = (await ask('GET', `/sites/${site}/alerts/deliveries`)) as { items: { state: string }[] }
        return items.length > 0 && items.every(({ state }) => state === 'sent')
      }, 'all delivered')
    }
    for (const { headers, body } of receiver.calls) {
      const { matters } = JSON.parse(body) as { matters: { id: string }[] }
      for (const { id } of matters) {
        const messages = told.get(id) ?? new Set()
        told.set(id, messages.add(String(headers['leaktide-message'])))
      }
    }
    const { items } = (await ask('GET', `/sites/${site}/alerts/matters`)) as { items: { id: string }[] }
    expect(items).toHaveLength(trips)
    expect([...told.keys()].sort()).toEqual(items.map(({ id }) => id).sort())
    for (const messages of told.values()) expect(messages.size).toBe(1)
    // Only what was in hand when the server was killed came again.
    const ids = receiver.calls.map(({ headers }) => headers['leaktide-message'])
    expect(ids.length - new Set(ids).size).toBeLessThanOrEqual(ROUNDS)
  }, 90_000)
})
