import { mkdirSync } from 'node:fs'
import type { AddressInfo } from 'node:net'
import { fileURLToPath } from 'node:url'
import { openAnalysis } from './analysis/analysis.ts'
import { createApp } from './app.ts'
import { settleReadings } from './jobs/settle.ts'
import { ensureOwnerKey } from './plugins/owner-key.ts'
import { startSchedule } from './schedule.ts'
import { dataFile } from './settings.ts'
import { openStore } from './store/sqlite/index.ts'

export interface ServeOptions {
  /** Data folder; made when missing. */
  readonly data: string
  readonly host: string
  readonly port: number
  readonly ownerKey: string | undefined
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
export async function serve({ data, host, port, ownerKey }: ServeOptions): Promise<Serving> {
  mkdirSync(data, { recursive: true, mode: 0o700 })
  const file = dataFile(data)
  const store = await openStore(file)
  const now = Date.now
  const { made, warnings } = await ensureOwnerKey(store, ownerKey, now())
  const analysis = openAnalysis({ store, file, now })
  const app = await createApp({
    store,
    analysis,
    now,
    page: pageFolder(),
    logger: {
      level: 'warn',
      stream: process.stderr,
      redact: ['req.headers.authorization', 'req.headers.cookie'],
    },
  })
  await app.listen({ host, port })
  const stopSchedule = startSchedule(store, (error) => app.log.error(error))

  return {
    url: urlOf(app.server.address() as AddressInfo, host),
    madeKey: made,
    warnings,
    stop: async () => {
      const impatience = setTimeout(() => app.server.closeAllConnections(), GRACE_MS)
      await stopSchedule()
      await app.close()
      clearTimeout(impatience)
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
