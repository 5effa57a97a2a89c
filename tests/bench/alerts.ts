import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { SiteSheet } from '../../core/contract/index.ts'
import { openAlerts } from '../../server/alerts/alerts.ts'
import { serve } from '../../server/serve.ts'
import { openStore } from '../../server/store/sqlite/index.ts'
import { startReceiver } from '../server/alerts-rig.ts'
import { until } from '../server/mqtt-broker.ts'
import { type Measure, median } from './harness.ts'

export const name = 'Alerts: from what happens to the call of the receiver'

const OWNER_KEY = 'owner-key-of-the-alert-bench-0123456789'
const SECRET = 'a-secret-of-the-alert-bench'
const SHEET = {
  name: 'Village bakery',
  timeZone: 'Europe/Vienna',
  rcds: [{ ref: 'A', ratedMa: 30 }],
  channels: [{ ref: 'tails-a', quantity: 'leakage', rcd: 'A' }],
}
const SITES = 200

/** A real server that is told of trips and left alone by a logger; and one look at many quiet sites. */
export async function run(): Promise<readonly Measure[]> {
  const folder = mkdtempSync(join(tmpdir(), 'leaktide-bench-'))
  const receiver = await startReceiver()
  try {
    const { trip, silence } = await delays(join(folder, 'one'), receiver)
    const look = await lookAtMany(join(folder, 'many.db'))
    return [
      { what: 'a trip is posted, the webhook is called', value: trip, unit: 'ms', target: '< 100 ms' },
      {
        what: 'a logger of one post a second stops, the webhook is called (told from 5 s on)',
        value: silence,
        unit: 's',
        target: '< 11 s',
      },
      { what: `one look at ${SITES} sites of eight channels`, value: look, unit: 'ms', target: '< 100 ms' },
    ]
  } finally {
    await receiver.close()
    rmSync(folder, { recursive: true, force: true })
  }
}

async function delays(
  data: string,
  receiver: Awaited<ReturnType<typeof startReceiver>>,
): Promise<{ readonly trip: number; readonly silence: number }> {
  const alertServer = { smtp: undefined, webhookHosts: new Set(['127.0.0.1']) }
  const server = await serve({ data, host: '127.0.0.1', port: 0, ownerKey: OWNER_KEY, alertServer })
  const call = async (method: string, path: string, body: unknown): Promise<{ readonly id: string }> => {
    const answer = await fetch(`${server.url}/api${path}`, {
      method,
      headers: { authorization: `Bearer ${OWNER_KEY}`, 'content-type': 'application/json' },
      body: JSON.stringify(body),
    })
    if (!answer.ok) throw new Error(`${path} answered ${answer.status}: ${await answer.text()}`)
    return (await answer.json()) as { readonly id: string }
  }
  const { id } = await call('POST', '/sites', SHEET)
  const about = { level: false, remedy: false }
  const webhook = { url: receiver.url, secret: SECRET }
  await call('PUT', `/sites/${id}/alerts`, { webhook, about, silence: { leastSeconds: 5 } })
  const trips: number[] = []
  for (let i = 0; i < 21; i++) {
    const calls = receiver.calls.length
    const at = Date.now() - i * 3_600_000
    const start = performance.now()
    await call('POST', `/sites/${id}/trips`, { rcd: 'A', at })
    await until(() => receiver.calls.length > calls, 'a call')
    trips.push(performance.now() - start)
  }
  const calls = receiver.calls.length
  let last = 0
  for (let i = 0; i < 5; i++) {
    await call('POST', `/sites/${id}/readings`, { blocks: [{ channel: 'tails-a', t: [Date.now()], v: [12] }] })
    last = performance.now()
    await new Promise((done) => setTimeout(done, 1_000))
  }
  await until(() => receiver.calls.length > calls, 'the silence', 30_000)
  const silence = (performance.now() - last) / 1_000
  await server.stop()
  return { trip: median(trips), silence }
}

async function lookAtMany(file: string): Promise<number> {
  const store = await openStore(file)
  const refs = Array.from({ length: 8 }, (_, i) => `c${i}`)
  const channels = refs.map((ref) => ({ ref, quantity: 'leakage' as const, rcd: 'A' }))
  const sheet = SiteSheet.parse({ ...SHEET, channels })
  let elapsed = 0
  const alerts = await openAlerts({
    store,
    findings: () => Promise.reject(new Error('nobody asks for findings here')),
    now: Date.now,
    elapsed: () => elapsed,
    server: { smtp: undefined, webhookHosts: new Set() },
    warn: (error) => console.error(error),
  })
  const batches = refs.map((channel) => ({ channel, t: Float64Array.of(1), v: Float64Array.of(1) }))
  const sites: string[] = []
  for (let i = 0; i < SITES; i++) sites.push((await store.createSite(sheet, { by: 'bench', at: 0 })).id)
  const looks: number[] = []
  for (let i = 0; i < 11; i++) {
    for (const site of sites) alerts.arrived(site, { batches })
    elapsed += 5_000
    const start = performance.now()
    await alerts.look()
    looks.push(performance.now() - start)
  }
  await alerts.close()
  await store.close()
  return median(looks)
}
