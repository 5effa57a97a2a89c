import { mkdirSync } from 'node:fs'
import type { AddressInfo } from 'node:net'
import { fileURLToPath } from 'node:url'
import { openAlerts } from './alerts/alerts.ts'
import { type AlertServerSettings, NO_ALERT_SERVER } from './alerts/settings.ts'
import { openAnalysis } from './analysis/analysis.ts'
import { createApp } from './app.ts'
import { settleReadings } from './jobs/settle.ts'
import { type MqttIntake, openMqtt } from './mqtt/mqtt-intake.ts'
import type { MqttSettings } from './mqtt/settings.ts'
import { LiveHub } from './plugins/live.ts'
import { ensureOwnerKey } from './plugins/owner-key.ts'
import { tellReadings } from './plugins/tell-readings.ts'
import { startSchedule } from './schedule.ts'
import { dataFile } from './settings.ts'
import { openStore } from './store/sqlite/index.ts'

export interface ServeOptions {
  /** Data folder; made when missing. */
  readonly data: string
  readonly host: string
  readonly port: number
  readonly ownerKey: string | undefined
  /** The broker to listen to. */
  readonly mqtt?: MqttSettings | undefined
  readonly alertServer?: AlertServerSettings
}

/** A server that answers. */
export interface Serving {
  readonly url: string
  /** An owner key that was just made and has to be shown, this once. */
  readonly madeKey: string | undefined
  readonly warnings: readonly string[]
  /** Finishes what is in flight, brings readings to rest, closes the store. */
  stop(): Promise<void>
}

/** How long calls in flight may take once the server is told to stop. */
const GRACE_MS = 10_000

/** Opens the data folder and listens. @throws {StoreError} when the folder is in use or newer than this program */
export async function serve(options: ServeOptions): Promise<Serving> {
  const { data, host, port, ownerKey, alertServer = NO_ALERT_SERVER } = options
  mkdirSync(data, { recursive: true, mode: 0o700 })
  const file = dataFile(data)
  const store = await openStore(file)
  const now = Date.now
  const { made, warnings } = await ensureOwnerKey(store, ownerKey, now())
  const analysis = openAnalysis({ store, file, now })
  const live = new LiveHub()
  const alerts = await openAlerts({
    store,
    findings: (site, rcd) => analysis.findings(site, rcd, null, null),
    now,
    elapsed: () => performance.now(),
    server: alertServer,
    warn: (error) => app.log.error(error),
    onChange: (site) => live.tell(site, { kind: 'matters' }),
  })
  live.watch((site, event) => {
    if (event.kind === 'sheet' || (event.kind === 'records' && event.record !== 'switching')) alerts.changed(site)
  })
  let mqtt: MqttIntake | undefined
  const app = await createApp({
    store,
    analysis,
    now,
    live,
    alerts,
    alertServer,
    mqtt: () => mqtt,
    page: pageFolder(),
    logger: {
      level: 'warn',
      stream: process.stderr,
      redact: ['req.headers.authorization', 'req.headers.cookie'],
    },
  })
  await app.listen({ host, port })
  const stopSchedule = startSchedule(store, alerts, (error) => app.log.error(error))
  // What a server that was killed left in its outbox does not wait for the first tick.
  alerts.look().catch((error: unknown) => app.log.error(error))
  if (options.mqtt !== undefined) {
    mqtt = openMqtt({
      settings: options.mqtt,
      inlet: {
        store,
        now,
        onReadings: (site, taken) => {
          tellReadings(live, site, taken)
          alerts.arrived(site, taken)
        },
        onRecords: (site, record) => live.tell(site, { kind: 'records', record }),
        onFault: (error) => app.log.error(error),
      },
      warn: (text) => app.log.warn(text),
    })
  }

  return {
    url: urlOf(app.server.address() as AddressInfo, host),
    madeKey: made,
    warnings,
    stop: async () => {
      const impatience = setTimeout(() => app.server.closeAllConnections(), GRACE_MS)
      await mqtt?.stop()
      await stopSchedule()
      await app.close()
      clearTimeout(impatience)
      await alerts.close()
      await analysis.close()
      await settleReadings(store)
      await store.close()
    },
  }
}

/** The built page lies beside the built server, and below dist when the server runs from its sources. */
function pageFolder(): string {
  return fileURLToPath(new URL(import.meta.url.endsWith('.ts') ? '../dist/web' : '../web', import.meta.url))
}

function urlOf({ address, port, family }: AddressInfo, host: string): string {
  const anywhere = address === '0.0.0.0' || address === '::'
  const name = anywhere ? 'localhost' : family === 'IPv6' ? `[${address}]` : host === 'localhost' ? host : address
  return `http://${name}:${port}`
}
