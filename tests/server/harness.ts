import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { FastifyInstance, InjectOptions, LightMyRequestResponse } from 'fastify'
import type { SiteKeyRole, SiteSheetIn } from '../../core/contract/index.ts'
import { type Analysis, openAnalysis } from '../../server/analysis/analysis.ts'
import { type AppOptions, createApp } from '../../server/app.ts'
import { ensureOwnerKey } from '../../server/plugins/owner-key.ts'
import type { Store } from '../../server/store/port.ts'
import { openStore } from '../../server/store/sqlite/index.ts'

export const OWNER_KEY = 'owner-key-of-the-server-tests-0123456789'
/** When the tests play, unless they say otherwise. */
export const NOW_MS: number = Date.UTC(2026, 8, 22, 12)

export const BAKERY: SiteSheetIn = Object.freeze({
  name: 'Village bakery',
  timeZone: 'Europe/Vienna',
  latitude: 47.3,
  longitude: 13.4,
  supply: { volts: 230, hertz: 50, earthing: 'TN-C-S' },
  rcds: [
    {
      ref: 'A',
      label: 'Bakehouse',
      ratedMa: 30,
      type: 'A',
      delay: 'general',
      rampTripMa: 23.5,
      circuits: [
        {
          ref: '7',
          label: 'Bakehouse sockets',
          device: 'B32',
          isolation: 'single-pole',
          loads: [{ ref: 'mixer', label: 'Mixer' }],
        },
        { ref: '3', loads: [{ ref: 'defrost' }] },
      ],
    },
    { ref: 'B', ratedMa: 100, delay: 'S' },
  ],
  channels: [
    { ref: 'tails-a', quantity: 'leakage', rcd: 'A', accuracy: { percent: 2, digits: 5 }, resolutionMa: 0.01 },
    { ref: 'leak-7', quantity: 'leakage', circuit: '7', reading: 'conductive' },
    { ref: 'amps-7', quantity: 'load-current', circuit: '7' },
    { ref: 'mixer-runs', quantity: 'running', load: 'mixer' },
    { ref: 'supply-a', quantity: 'voltage', rcd: 'A' },
    { ref: 'rain', quantity: 'rain' },
    { ref: 'outdoor', quantity: 'temperature' },
    { ref: 'rh', quantity: 'humidity' },
  ],
}) as SiteSheetIn

/** The whole app on a real store in a folder of its own; nothing listens. */
export interface Harness {
  readonly app: FastifyInstance
  readonly store: Store
  readonly analysis: Analysis
  readonly dataFile: string
  /** What the app takes for now; tests move it. */
  readonly clock: { now: number }
  /** Calls with the owner key, or the key given (null: none). */
  call(method: string, path: string, body?: unknown, options?: CallOptions): Promise<LightMyRequestResponse>
  makeSite(sheet?: SiteSheetIn): Promise<string>
  makeKey(site: string, role: SiteKeyRole): Promise<{ readonly id: string; readonly key: string }>
  close(): Promise<void>
}

export interface CallOptions {
  readonly key?: string | null
  readonly headers?: Readonly<Record<string, string>>
  readonly cookies?: Readonly<Record<string, string>>
}

/** @param wrap stands between the app and its store, to let single calls fail
 * @param page folder of a built page; none when left out
 * @param more what else the app is made with */
export async function startHarness(
  wrap: (store: Store) => Store = (store) => store,
  page?: string,
  more: Partial<AppOptions> = {},
): Promise<Harness> {
  const folder = mkdtempSync(join(tmpdir(), 'leaktide-server-'))
  const file = join(folder, 'leaktide.db')
  const store = await openStore(file)
  const clock = { now: NOW_MS }
  const now = (): number => clock.now
  await ensureOwnerKey(store, OWNER_KEY, clock.now)
  const analysis = openAnalysis({ store, file, now })
  const app = await createApp({ store: wrap(store), analysis, now, page: page ?? join(folder, 'no-page'), ...more })

  const call: Harness['call'] = (method, path, body, { key = OWNER_KEY, headers = {}, cookies = {} } = {}) => {
    const raw = typeof body === 'string' || Buffer.isBuffer(body)
    return app.inject({
      method: method as NonNullable<InjectOptions['method']>,
      url: `/api${path}`,
      headers: {
        ...(key === null ? {} : { authorization: `Bearer ${key}` }),
        ...(body === undefined ? {} : { 'content-type': 'application/json' }),
        ...headers,
      },
      cookies: { ...cookies },
      ...(body === undefined ? {} : { payload: raw ? (body as string) : JSON.stringify(body) }),
    })
  }
  return {
    app,
    store,
    analysis,
    dataFile: file,
    clock,
    call,
    makeSite: async (sheet = BAKERY) => (await call('POST', '/sites', sheet)).json<{ id: string }>().id,
    makeKey: async (site, role) => (await call('POST', `/sites/${site}/keys`, { role, label: `${role} key` })).json(),
    close: async () => {
      await app.close()
      await analysis.close()
      await store.close()
      rmSync(folder, { recursive: true, force: true })
    },
  }
}
