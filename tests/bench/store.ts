import { mkdtempSync, rmSync, statSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import { SiteSheet } from '../../core/contract/index.ts'
import type { Series } from '../../core/timeline/series.ts'
import { traceColumns } from '../../core/timeline/trace-columns.ts'
import { openReader, openStore } from '../../server/store/sqlite/index.ts'
import { type Measure, median } from './harness.ts'

export const name = 'store'

const T0 = Date.UTC(2026, 8, 21)
const WEEK_S = 604_800
const WEEK_MS = 1_000 * WEEK_S
const A_TRANSACTION = 10_000
const CHANNELS = 8
const COLUMNS = 1_500

/** A leakage channel at 1 Hz with 0.01 mA resolution: a level that wanders, switching steps, noise of 0.1 mA. */
function week(seed: number): Series {
  let state = seed
  const random = (): number => {
    state = (Math.imul(state, 1_664_525) + 1_013_904_223) >>> 0
    return state / 2 ** 32
  }
  const t = new Float64Array(WEEK_S)
  const v = new Float64Array(WEEK_S)
  let level = 9
  for (let i = 0; i < WEEK_S; i++) {
    if (random() < 1 / 900) level = 6 + 8 * random()
    const noise = 0.1 * Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random())
    t[i] = T0 + 1_000 * i
    v[i] = Math.round(100 * (level + Math.sin(i / 13_750) + noise)) / 100
  }
  return { t, v }
}

function* parts({ t, v }: Series): Generator<Series> {
  for (let i = 0; i < t.length; i += A_TRANSACTION) {
    yield { t: t.subarray(i, i + A_TRANSACTION), v: v.subarray(i, i + A_TRANSACTION) }
  }
}

async function timed(work: () => unknown): Promise<number> {
  const start = performance.now()
  await work()
  return performance.now() - start
}

async function medianOf(runs: number, work: () => unknown): Promise<number> {
  const times: number[] = []
  for (let i = 0; i < runs; i++) times.push(await timed(work))
  return median(times)
}

/** The yardstick: plain rows by better-sqlite3, as durable as the store. */
class PlainRows {
  readonly #db: Database.Database
  readonly #range

  constructor(file: string) {
    this.#db = new Database(file)
    this.#db.pragma('journal_mode = WAL')
    this.#db.pragma('synchronous = FULL')
    this.#db.exec('CREATE TABLE reading (channel INTEGER, t INTEGER, v REAL, PRIMARY KEY (channel, t)) WITHOUT ROWID')
    this.#range = this.#db
      .prepare<[number, number], [number, number]>(
        'SELECT t, v FROM reading WHERE channel = 1 AND t >= ? AND t < ? ORDER BY t',
      )
      .raw()
  }

  insert(series: Series): void {
    const insert = this.#db.prepare('INSERT INTO reading VALUES (1, ?, ?) ON CONFLICT DO NOTHING')
    const all = this.#db.transaction(({ t, v }: Series) => {
      for (let i = 0; i < t.length; i++) insert.run(t[i], v[i])
    })
    for (const part of parts(series)) all(part)
  }

  read(from: number, to: number): Series {
    const rows = this.#range.all(from, to)
    return { t: Float64Array.from(rows, (row) => row[0]), v: Float64Array.from(rows, (row) => row[1]) }
  }

  close(): void {
    this.#db.close()
  }
}

/** Intake against plain rows, bytes at rest, a week into typed arrays, traces at several zooms. */
export async function run(): Promise<Measure[]> {
  const folder = mkdtempSync(join(tmpdir(), 'leaktide-bench-'))
  try {
    return await measure(folder)
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}

async function measure(folder: string): Promise<Measure[]> {
  const measures: Measure[] = []
  const file = join(folder, 'data.db')
  const store = await openStore(file)
  const act = { by: 'bench', at: T0 }
  const channels = Array.from({ length: CHANNELS }, (_, i) => ({ ref: `c${i}`, quantity: 'leakage' as const }))
  const sheet = SiteSheet.parse({ name: 'Bakery', timeZone: 'Europe/Vienna', channels })
  const empty = await store.createSite(sheet, act)
  const site = empty.id

  // Turn and turn about, so that a slow minute of the machine meets both.
  const rows = new PlainRows(join(folder, 'rows.db'))
  const first = week(1)
  let rowsMs = 0
  let storeMs = 0
  for (const part of parts(first)) {
    rowsMs += await timed(() => rows.insert(part))
    storeMs += await timed(() => store.append(site, [{ channel: 'c0', ...part }]))
  }
  const perSecond = (ms: number): number => (1_000 * WEEK_S) / ms
  measures.push(
    { what: 'plain rows, 10,000 a transaction', value: perSecond(rowsMs), unit: 'readings/s' },
    { what: 'append, 10,000 a call', value: perSecond(storeMs), unit: 'readings/s' },
    { what: 'append over plain rows', value: rowsMs / storeMs, unit: '×', target: '≥ 1.0' },
  )

  const more: Series[] = []
  for (let c = 1; c < CHANNELS; c++) {
    more.push(week(c + 1))
    for (const part of parts(more[c - 1]!)) await store.append(site, [{ channel: `c${c}`, ...part }])
  }
  await store.close()
  const bytes = statSync(file).size / (CHANNELS * WEEK_S)
  measures.push({ what: 'at rest, all of the file', value: bytes, unit: 'bytes/reading', target: '≤ 2.5' })

  const reader = await openReader(file)
  const loadMs = await medianOf(5, async () => {
    for (let c = 0; c < CHANNELS; c++) await reader.readings(site, `c${c}`, T0, T0 + WEEK_MS)
  })
  measures.push({ what: `week × ${CHANNELS} channels into typed arrays`, value: loadMs, unit: 'ms', target: '≤ 250' })

  for (const [zoom, share] of [
    ['a week', 1],
    ['a day', 1 / 7],
    ['an hour', 1 / 168],
  ] as const) {
    const from = T0 + WEEK_MS / 3
    const [start, end] = share === 1 ? [T0, T0 + WEEK_MS] : [from, from + WEEK_MS * share]
    const traceMs = await medianOf(15, () => reader.trace(site, 'c0', start, end, COLUMNS))
    const plainMs = await medianOf(3, () => traceColumns(rows.read(start, end), start, end, COLUMNS))
    measures.push({ what: `trace of ${zoom}, ${COLUMNS} columns`, value: traceMs, unit: 'ms', target: '< 25' })
    measures.push({ what: `  the same from plain rows, over it`, value: plainMs / traceMs, unit: '×', target: '≥ 20' })
  }
  rows.close()
  await reader.close()

  measures.push(...(await measureLive(join(folder, 'live.db'), sheet)))
  return measures
}

/** A board that posts one reading of each channel every second, an hour of it. */
async function measureLive(file: string, sheet: SiteSheet): Promise<Measure[]> {
  const store = await openStore(file)
  const site = (await store.createSite(sheet, { by: 'bench', at: T0 })).id
  const seconds = 3_600
  const liveMs = await timed(async () => {
    for (let s = 0; s < seconds; s++) {
      const t = Float64Array.of(T0 + 1_000 * s)
      const v = Float64Array.of(9 + (s % 50) / 100)
      await store.append(
        site,
        sheet.channels.map(({ ref }) => ({ channel: ref, t, v })),
      )
    }
  })
  const settleMs = await timed(() => store.settle(Number.POSITIVE_INFINITY))
  await store.close()
  return [
    { what: `live, ${CHANNELS} channels, one reading each a call`, value: (1_000 * liveMs) / seconds, unit: 'µs/call' },
    { what: 'settling those that still wait', value: settleMs, unit: 'ms' },
  ]
}
