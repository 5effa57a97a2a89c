import { mkdtempSync, rmSync } from 'node:fs'
import type { AddressInfo } from 'node:net'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { bakeryWeek } from '../../core/simulate/bakery.ts'
import type { Simulated } from '../../core/simulate/simulated.ts'
import { openAnalysis } from '../../server/analysis/analysis.ts'
import { createApp } from '../../server/app.ts'
import { LiveHub } from '../../server/plugins/live.ts'
import { ensureOwnerKey } from '../../server/plugins/owner-key.ts'
import type { MatterChange } from '../../server/store/alert-port.ts'
import { openStore } from '../../server/store/sqlite/index.ts'

const OWNER = 'owner-key-of-the-browser-tests-0123456789'
/** Monday, local midnight in Vienna. */
const START = Date.UTC(2026, 8, 20, 22)
const PAGE = fileURLToPath(new URL('../../dist/web', import.meta.url))

/** The whole program with the bakery's week in it, listening. */
export interface BakeryServer {
  readonly url: string
  readonly site: string
  readonly ownerKey: string
  readonly week: Simulated
  /** Calls the API with a key (the owner's unless told otherwise) and gives the JSON of the answer. */
  call<T>(method: string, path: string, body?: unknown): Promise<T>
  /** Opens and closes matters of the site, as whoever watches it does. */
  notice(change: MatterChange): Promise<void>
  makeKey(role: 'viewer' | 'occupant' | 'logger'): Promise<string>
  stop(): Promise<void>
}

/** Every n-th reading of fast channels is enough for a page; all of them are for the benchmarks. */
export async function startBakery(thin = 10): Promise<BakeryServer> {
  const folder = mkdtempSync(join(tmpdir(), 'leaktide-page-'))
  const file = join(folder, 'leaktide.db')
  const store = await openStore(file)
  const now = Date.now
  await ensureOwnerKey(store, OWNER, now())
  const analysis = openAnalysis({ store, file, now })
  const live = new LiveHub()
  const app = await createApp({ store, analysis, now, page: PAGE, live })
  await app.listen({ host: '127.0.0.1', port: 0 })
  const url = `http://127.0.0.1:${(app.server.address() as AddressInfo).port}`
  const call = async <T>(method: string, path: string, body?: unknown): Promise<T> => {
    const headers: Record<string, string> = { authorization: `Bearer ${OWNER}` }
    const init: RequestInit = { method, headers }
    if (body !== undefined) {
      headers['content-type'] = 'application/json'
      init.body = JSON.stringify(body)
    }
    const answer = await fetch(`${url}/api${path}`, init)
    if (!answer.ok) throw new Error(`${method} ${path}: ${answer.status} ${await answer.text()}`)
    return (await answer.json()) as T
  }
  const week = bakeryWeek(START)
  const { id: site } = await call<{ id: string }>('POST', '/sites', week.sheet)
  await postWeek(call, site, week, thin)
  return {
    url,
    site,
    ownerKey: OWNER,
    week,
    call,
    notice: async (change) => {
      await store.alerts.change(site, change)
      live.tell(site, { kind: 'matters' })
    },
    makeKey: async (role) =>
      (await call<{ key: string }>('POST', `/sites/${site}/keys`, { role, label: `The ${role}` })).key,
    stop: async () => {
      app.server.closeAllConnections()
      await app.close()
      await analysis.close()
      await store.close()
      rmSync(folder, { recursive: true, force: true })
    },
  }
}

async function postWeek(call: BakeryServer['call'], site: string, week: Simulated, thin: number): Promise<void> {
  const most = 200_000
  for (const [channel, series] of week.series) {
    const every = series.t.length > 10_000 ? thin : 1
    const t = [...series.t].filter((_, i) => i % every === 0)
    const v = [...series.v].filter((_, i) => i % every === 0)
    for (let i = 0; i < t.length; i += most) {
      const block = { channel, t: t.slice(i, i + most), v: v.slice(i, i + most) }
      await call('POST', `/sites/${site}/readings`, { blocks: [block] })
    }
  }
  if (week.trips.length > 0) await call('POST', `/sites/${site}/trips`, week.trips)
  if (week.switchings.length > 0) await call('POST', `/sites/${site}/switchings`, { changes: week.switchings })
  for (const test of week.tests) await call('POST', `/sites/${site}/tests`, test)
  for (const timetable of week.timetables) await call('POST', `/sites/${site}/timetables`, timetable)
}
