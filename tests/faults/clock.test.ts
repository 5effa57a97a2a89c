import { cpSync } from 'node:fs'
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { BAKEHOUSE, START_MS, seeded } from './bakehouse.ts'
import { Client } from './client.ts'
import { buildServer, OWNER_KEY, startServer, temporaryFolder } from './server-process.ts'

const MINUTE = 60_000
const DAYS = 6
/** How wrong the second clock is: more than a year, so that no cache or session could still count. */
const SHIFT_MS = 400 * 24 * 60 * MINUTE
const DEFROST_EVERY_MS = 8 * 60 * MINUTE

beforeAll(buildServer)

describe('findings', () => {
  const folder = temporaryFolder()
  afterAll(folder.remove)

  it('are the same bytes whatever the clock and the time zone of the machine', async () => {
    const origin = join(folder.path, 'origin')
    const site = await fill(origin)
    const copies = ['right', 'wrong'].map((name) => join(folder.path, name))
    for (const copy of copies) cpSync(origin, copy, { recursive: true })
    const shifted = pathToFileURL(join(import.meta.dirname, 'shifted-clock.mjs')).href
    const right = await findingsOf(copies[0]!, site, { TZ: 'UTC' })
    const wrong = await findingsOf(copies[1]!, site, {
      TZ: 'Pacific/Kiritimati',
      LC_ALL: 'tr_TR.UTF-8',
      NODE_OPTIONS: `--import ${shifted}`,
      LEAKTIDE_TEST_SHIFT_MS: String(SHIFT_MS),
    })
    expect(wrong.clock - right.clock).toBeGreaterThanOrEqual(SHIFT_MS)
    expect(wrong.findings).toBe(right.findings)
    expect(JSON.parse(right.findings)).toMatchObject({ rcd: 'A', coverage: { trips: 3 } })
  }, 60_000)
})

/** A data folder with six days of a bakehouse whose defrost heater leaks. @returns the site's id */
async function fill(data: string): Promise<string> {
  const server = await startServer(data)
  try {
    const client = new Client(server.url)
    const made = await client.post<{ id: string }>('/sites', BAKEHOUSE)
    const site = made!.body.id
    const random = seeded(5)
    const t = Array.from({ length: DAYS * 24 * 60 }, (_, i) => START_MS + i * MINUTE)
    const heats = t.map((at) => Number((at - START_MS) % DEFROST_EVERY_MS < 30 * MINUTE))
    const blocks = [
      { channel: 'tails-a', t, v: heats.map((on) => Math.round((12 + 4 * on + random()) * 100) / 100) },
      { channel: 'defrost-runs', t, v: heats },
    ]
    expect(await client.post(`/sites/${site}/readings`, { blocks })).toMatchObject({ status: 200 })
    const trips = [1, 7, 13].map((n) => ({ rcd: 'A', at: START_MS + n * DEFROST_EVERY_MS + 7 * MINUTE }))
    expect((await client.post<unknown>(`/sites/${site}/trips`, trips))!.status).toBeLessThan(300)
    return site
  } finally {
    await server.end('SIGTERM')
  }
}

/** The findings as they came, and what the server took the time for. */
async function findingsOf(
  data: string,
  site: string,
  env: Readonly<Record<string, string>>,
): Promise<{ readonly findings: string; readonly clock: number }> {
  const server = await startServer(data, env)
  try {
    const span = `from=${new Date(START_MS).toISOString()}&to=${new Date(START_MS + DAYS * 24 * 60 * MINUTE).toISOString()}`
    const response = await fetch(`${server.url.replace(/\/$/, '')}/api/sites/${site}/rcds/A/findings?${span}`, {
      headers: { authorization: `Bearer ${OWNER_KEY}` },
    })
    const findings = await response.text()
    const made = await new Client(server.url).post<{ createdAt: string }>('/sites', BAKEHOUSE)
    return { findings, clock: Date.parse(made!.body.createdAt) }
  } finally {
    await server.end('SIGTERM')
  }
}
