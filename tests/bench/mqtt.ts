import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { SiteSheet } from '../../core/contract/index.ts'
import { SiteSheet as Sheet } from '../../core/contract/index.ts'
import { openMqtt } from '../../server/mqtt/mqtt-intake.ts'
import { readMqttSettings } from '../../server/mqtt/settings.ts'
import type { Store } from '../../server/store/port.ts'
import { openStore } from '../../server/store/sqlite/index.ts'
import { connectGateway, startBroker, until } from '../server/mqtt-broker.ts'
import { type Measure, median } from './harness.ts'

export const name = 'MQTT: messages of a broker, each durable before it is acknowledged'

const MESSAGES = 2_000
const ROUNDS = 3
const T0 = Date.UTC(2026, 8, 7)
const SHEET: SiteSheet = Sheet.parse({
  name: 'Village bakery',
  timeZone: 'Europe/Vienna',
  rcds: [{ ref: 'A', ratedMa: 30 }],
  channels: [{ ref: 'tails-a', quantity: 'leakage', rcd: 'A' }],
})

/** A broker full of messages, emptied by a listener; beside it the same appends without a broker. */
export async function run(): Promise<readonly Measure[]> {
  const folder = mkdtempSync(join(tmpdir(), 'leaktide-bench-'))
  const store = await openStore(join(folder, 'leaktide.db'))
  const { id } = await store.createSite(SHEET, { by: 'bench', at: T0 })
  try {
    const single = await rates(store, id, 1, 0)
    const many = await rates(store, id, 60, MESSAGES * ROUNDS * 2)
    return [
      { what: 'one reading a message', value: single.mqtt, unit: 'messages/s' },
      { what: 'the same appended without a broker', value: single.direct, unit: 'messages/s' },
      { what: 'with the broker against without', value: single.mqtt / single.direct, unit: '×', target: '≥ 0.3' },
      { what: 'sixty readings a message', value: many.mqtt, unit: 'messages/s' },
      { what: 'sixty readings a message', value: 60 * many.mqtt, unit: 'readings/s' },
    ]
  } finally {
    await store.close()
    rmSync(folder, { recursive: true, force: true })
  }
}

async function rates(
  store: Store,
  site: string,
  size: number,
  offset: number,
): Promise<{ mqtt: number; direct: number }> {
  const mqtt: number[] = []
  const direct: number[] = []
  for (let round = 0; round < ROUNDS; round++) {
    const first = offset + 2 * round * MESSAGES
    mqtt.push(await throughBroker(store, site, size, first))
    const start = performance.now()
    for (let i = 0; i < MESSAGES; i++) {
      const { t, v } = columns(first + MESSAGES + i, size)
      await store.append(site, [{ channel: 'tails-a', t: Float64Array.from(t), v: Float64Array.from(v) }])
    }
    direct.push(MESSAGES / ((performance.now() - start) / 1_000))
  }
  return { mqtt: median(mqtt), direct: median(direct) }
}

async function throughBroker(store: Store, site: string, size: number, first: number): Promise<number> {
  const broker = await startBroker()
  const url = `mqtt://127.0.0.1:${broker.port}`
  const none = { prefix: undefined, user: undefined, password: undefined, ca: undefined, clientId: undefined }
  const settings = readMqttSettings({ ...none, url, sites: `bakery=${site}` }, 'leaktide-bench')
  if ('why' in settings) throw new Error(settings.why)
  const intake = openMqtt({
    settings,
    inlet: {
      store,
      now: () => T0,
      onReadings: () => undefined,
      onRecords: () => undefined,
      onFault: (error) => console.error(error),
    },
    warn: (text) => console.error(text),
  })
  await until(() => intake.connected(), 'connected')
  const gateway = await connectGateway(broker.port)
  const start = performance.now()
  const sending = Array.from({ length: MESSAGES }, (_, i) => {
    const body = JSON.stringify({ blocks: [{ channel: 'tails-a', ...columns(first + i, size) }] })
    return gateway.publishAsync('leaktide/bakery/readings', body, { qos: 1 })
  })
  await Promise.all(sending)
  await until(() => broker.acknowledged() >= MESSAGES, 'all acknowledged', 120_000)
  const seconds = (performance.now() - start) / 1_000
  await gateway.endAsync(true)
  await intake.stop()
  await broker.close()
  return MESSAGES / seconds
}

function columns(message: number, size: number): { readonly t: number[]; readonly v: number[] } {
  const t = Array.from({ length: size }, (_, i) => T0 + (message * size + i) * 1_000)
  return { t, v: t.map((_, i) => Math.round(1_200 + ((message * 7_919 + i) % 300)) / 100) }
}
