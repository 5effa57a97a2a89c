import { spawn } from 'node:child_process'
import { once } from 'node:events'
import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { Agent, request } from 'node:http'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import Database from 'better-sqlite3'
import type { SiteSheetIn } from '../../core/contract/index.ts'
import { type Measure, median } from './harness.ts'

export const name = 'HTTP: intake, traces and findings of a real server over loopback'

const OWNER_KEY = 'owner-key-of-the-http-bench-0123456789'
const BODY = 10_000
const BODIES = 60
const WEEK_S = 604_800
const T0 = Date.UTC(2026, 8, 7)
const MAIN = fileURLToPath(new URL('../../dist/server/main.js', import.meta.url))

/** Posts a week at 1 Hz in bodies of 10,000, beside the same into plain rows; then asks for traces and findings. */
export async function run(): Promise<readonly Measure[]> {
  const folder = mkdtempSync(join(tmpdir(), 'leaktide-bench-'))
  const server = spawn(process.execPath, [MAIN, 'serve', '--data', join(folder, 'data'), '--port', '0'], {
    env: { ...process.env, NODE_ENV: 'production', LEAKTIDE_OWNER_KEY: OWNER_KEY },
    stdio: ['ignore', 'pipe', 'inherit'],
  })
  try {
    const url = await listening(server.stdout)
    const client = new Client(url)
    const atRest = residentMb(server.pid!)
    const { id } = (await client.json('POST', '/api/sites', SHEET)) as { id: string }
    const http: number[] = []
    const rows: number[] = []
    const plain = new PlainRows(join(folder, 'plain.db'))
    for (let b = 0; b < BODIES; b++) {
      const { t, v } = readings(b)
      const body = JSON.stringify({ blocks: [{ channel: 'tails-a', t, v }] })
      const posted = await timed(() => client.ask('POST', `/api/sites/${id}/readings`, body))
      const inserted = await timed(async () => plain.insert(t, v))
      if (b < 10) continue // both are warm now
      http.push(BODY / posted)
      rows.push(BODY / inserted)
    }
    plain.close()
    const parse = await parseOnly(client, id)
    await fillRest(client, id)
    const traces: number[] = []
    for (let i = 0; i < 21; i++) {
      const span = WEEK_S / 2 ** (i % 7)
      const path = `/api/sites/${id}/channels/tails-a/trace?columns=1500&from=${T0 + i * 1_000}&to=${T0 + span * 1_000}`
      traces.push(1_000 * (await timed(() => client.ask('GET', path))))
    }
    const trips = Array.from({ length: 10 }, (_, i) => ({ rcd: 'A', at: T0 + (i * 16 + 5) * 3_600_000 }))
    await client.json('POST', `/api/sites/${id}/trips`, trips)
    const path = `/api/sites/${id}/rcds/A/findings?from=${T0}&to=${T0 + WEEK_S * 1_000}`
    let greatest = 0
    const watch = setInterval(() => {
      greatest = Math.max(greatest, residentMb(server.pid!))
    }, 20)
    const cold = 1_000 * (await timed(() => client.ask('GET', path)))
    clearInterval(watch)
    const warm: number[] = []
    for (let i = 0; i < 11; i++) warm.push(1_000 * (await timed(() => client.ask('GET', path))))
    const intake = median(http)
    const direct = median(rows)
    return [
      { what: 'bodies of 10,000, parsed and refused for one unequal column', value: parse, unit: 'readings/s' },
      { what: 'bodies of 10,000, stored', value: intake, unit: 'readings/s' },
      { what: 'the same into plain rows, no HTTP', value: direct, unit: 'readings/s' },
      { what: 'stored over HTTP against plain rows', value: intake / direct, unit: '×', target: '≥ 0.8, aim 1.0' },
      {
        what: 'trace of a week at 1 Hz, any zoom, 1,500 columns',
        value: median(traces),
        unit: 'ms',
        target: '< 25 ms',
      },
      { what: 'findings of a week at 1 Hz, from cold', value: cold, unit: 'ms', target: '< 2,000 ms' },
      { what: 'findings, unchanged repeat', value: median(warm), unit: 'ms', target: '< 20 ms' },
      { what: 'memory at rest', value: atRest, unit: 'MB', target: '< 150 MB' },
      { what: 'memory while a week is analysed, at most', value: greatest, unit: 'MB', target: '< 500 MB' },
    ]
  } finally {
    server.kill('SIGTERM')
    await once(server, 'close')
    rmSync(folder, { recursive: true, force: true })
  }
}

const LOADS = Array.from({ length: 12 }, (_, i) => `load-${i}`)
const SHEET: SiteSheetIn = {
  name: 'Village bakery',
  timeZone: 'Europe/Vienna',
  rcds: [{ ref: 'A', ratedMa: 30, circuits: [{ ref: '7', loads: LOADS.map((ref) => ({ ref })) }] }],
  channels: [
    { ref: 'tails-a', quantity: 'leakage', rcd: 'A', resolutionMa: 0.01 },
    ...LOADS.map((load) => ({ ref: `${load}-runs`, quantity: 'running' as const, load })),
  ],
}

/** The b-th 10,000 readings of a leakage channel at 1 Hz: a level with noise in steps of 0.01 mA. */
function readings(b: number): { t: number[]; v: number[] } {
  const t = Array.from({ length: BODY }, (_, i) => T0 + (b * BODY + i) * 1_000)
  const v = t.map((_, i) => Math.round(1_200 + 300 * Math.sin((b * BODY + i) / 5_000) + ((i * 7_919) % 13)) / 100)
  return { t, v }
}

async function fillRest(client: Client, site: string): Promise<void> {
  const { t, v } = readings(BODIES)
  const rest = WEEK_S - BODIES * BODY
  const tail = { channel: 'tails-a', t: t.slice(0, rest), v: v.slice(0, rest) }
  const minutes = Array.from({ length: WEEK_S / 60 }, (_, i) => T0 + i * 60_000)
  const runs = LOADS.map((load, n) => ({
    channel: `${load}-runs`,
    t: minutes,
    v: minutes.map((_, i) => Number((i + 37 * n) % (90 + 11 * n) < 20 + n)),
  }))
  await client.json('POST', `/api/sites/${site}/readings`, { blocks: [tail, ...runs] })
}

async function parseOnly(client: Client, site: string): Promise<number> {
  const { t, v } = readings(0)
  const body = JSON.stringify({ blocks: [{ channel: 'tails-a', t, v: [...v, 1] }] })
  const rates: number[] = []
  for (let i = 0; i < 20; i++) {
    rates.push(BODY / (await timed(() => client.ask('POST', `/api/sites/${site}/readings`, body, 422))))
  }
  return median(rates)
}

/** Plain rows as the simplest program would keep them. */
class PlainRows {
  readonly #db: Database.Database
  readonly #insert: (t: readonly number[], v: readonly number[]) => void

  constructor(file: string) {
    this.#db = new Database(file)
    this.#db.pragma('journal_mode = WAL')
    this.#db.pragma('synchronous = FULL')
    this.#db.exec('CREATE TABLE reading (channel INTEGER, t INTEGER, v REAL, PRIMARY KEY (channel, t)) WITHOUT ROWID')
    const row = this.#db.prepare('INSERT INTO reading VALUES (1, ?, ?)')
    this.#insert = this.#db.transaction((t: readonly number[], v: readonly number[]) => {
      for (let i = 0; i < t.length; i++) row.run(t[i], v[i])
    })
  }

  insert(t: readonly number[], v: readonly number[]): void {
    this.#insert(t, v)
  }

  close(): void {
    this.#db.close()
  }
}

/** One kept-alive connection. */
class Client {
  readonly #url: string
  readonly #agent = new Agent({ keepAlive: true, maxSockets: 1 })

  constructor(url: string) {
    this.#url = url
  }

  async json(method: string, path: string, body: unknown): Promise<unknown> {
    return JSON.parse(await this.ask(method, path, JSON.stringify(body)))
  }

  ask(method: string, path: string, body?: string, expected?: number): Promise<string> {
    return new Promise((resolve, reject) => {
      const headers = { authorization: `Bearer ${OWNER_KEY}`, 'content-type': 'application/json' }
      const call = request(new URL(path, this.#url), { method, headers, agent: this.#agent }, (answer) => {
        const pieces: Buffer[] = []
        answer.on('data', (piece: Buffer) => pieces.push(piece))
        answer.on('end', () => {
          const text = Buffer.concat(pieces).toString()
          const status = answer.statusCode ?? 0
          if (expected === undefined ? status < 300 : status === expected) resolve(text)
          else reject(new Error(`${method} ${path} answered ${status}: ${text.slice(0, 500)}`))
        })
      })
      call.on('error', reject)
      call.end(body)
    })
  }
}

/** Seconds that something takes. */
async function timed(what: () => Promise<unknown>): Promise<number> {
  const start = performance.now()
  await what()
  return (performance.now() - start) / 1_000
}

async function listening(stdout: NodeJS.ReadableStream): Promise<string> {
  let seen = ''
  for await (const piece of stdout) {
    seen += String(piece)
    const url = /listening on (http\S+)/.exec(seen)?.[1]
    if (url) return url
  }
  throw new Error('the server ended before it listened')
}

/** Resident memory of a process, as Linux tells it. */
function residentMb(pid: number): number {
  const kb = /VmRSS:\s+(\d+)/.exec(readFileSync(`/proc/${pid}/status`, 'utf8'))?.[1]
  return Number(kb) / 1_024
}
