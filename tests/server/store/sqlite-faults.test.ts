import { type ChildProcess, spawn } from 'node:child_process'
import { once } from 'node:events'
import { cpSync, mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import Database from 'better-sqlite3'
import { afterAll, afterEach, describe, expect, it } from 'vitest'
import type { Store, StoreReader } from '../../../server/store/port.ts'
import { openReader, openStore } from '../../../server/store/sqlite/index.ts'
import { migrationsFolder } from '../../../server/store/sqlite/migrate.ts'
import { ACT, bakery, batch, rowsOf, T0 } from './bakery.ts'

const HOUR = 3_600_000
const folder = mkdtempSync(join(tmpdir(), 'leaktide-faults-'))
afterAll(() => rmSync(folder, { recursive: true, force: true }))

const opened: StoreReader[] = []
afterEach(async () => {
  for (const one of opened.splice(0)) await one.close()
})

async function open(file: string, options?: Parameters<typeof openStore>[1]): Promise<Store> {
  const store = await openStore(file, options)
  opened.push(store)
  return store
}

let files = 0
const newFile = (): string => join(folder, `${++files}.db`)
const code = (name: string): unknown => expect.objectContaining({ name: 'StoreError', code: name })
const regular = (n: number, from = T0): [number, number][] =>
  Array.from({ length: n }, (_, i) => [from + 1_000 * i, ((i * 7_919) % 100) / 100])

describe('migrations', () => {
  const copy = (): string => {
    const to = join(folder, `migrations-${++files}`)
    cpSync(migrationsFolder(), to, { recursive: true })
    return to
  }

  it('run once, in order, and are recorded', async () => {
    const file = newFile()
    const migrations = copy()
    await (await openStore(file, { migrations })).close()
    writeFileSync(join(migrations, '9000-more.sql'), 'CREATE TABLE more (x INTEGER) STRICT;')
    await (await openStore(file, { migrations })).close()
    await (await openStore(file, { migrations })).close()
    const db = new Database(file, { readonly: true })
    const names = db.prepare('SELECT name FROM migration ORDER BY version').pluck().all()
    db.close()
    expect(names).toEqual([...readdirSync(migrationsFolder()).sort(), '9000-more.sql'])
  })

  it('refuse data of a newer program, and data of a changed migration', async () => {
    const file = newFile()
    const migrations = copy()
    const more = (sql: string): void => writeFileSync(join(migrations, '9000-more.sql'), sql)
    more('CREATE TABLE more (x INTEGER) STRICT;\n')
    await (await openStore(file, { migrations })).close()
    await expect(openStore(file)).rejects.toEqual(code('newer_schema'))
    await expect(openReader(file)).rejects.toEqual(code('newer_schema'))
    more('CREATE TABLE other (x INTEGER) STRICT;\n')
    await expect(openStore(file, { migrations })).rejects.toEqual(code('changed_migration'))
    // A checkout with other line ends is the same migration.
    more('CREATE TABLE more (x INTEGER) STRICT;\r\n')
    await open(file, { migrations })
  })

  it('leave nothing of one that fails', async () => {
    const file = newFile()
    const migrations = copy()
    writeFileSync(join(migrations, '9000-half.sql'), 'CREATE TABLE half (x INTEGER) STRICT; CREATE TABLE half (x);')
    await expect(openStore(file, { migrations })).rejects.toThrow('half')
    const store = await open(file)
    expect((await store.sites({ limit: 1 })).items).toEqual([])
  })
})

describe('one writing process', () => {
  const hold = fileURLToPath(new URL('hold-store.ts', import.meta.url))
  const running: ChildProcess[] = []
  afterEach(() => {
    for (const child of running.splice(0)) child.kill('SIGKILL')
  })

  it('is all there can be, until it ends, also by kill -9', async () => {
    const file = newFile()
    const child = spawn(process.execPath, ['--expose-gc', '--import', 'tsx', hold, file], {
      stdio: ['ignore', 'pipe', 'inherit'],
    })
    running.push(child)
    const [line] = (await once(child.stdout, 'data')) as [Buffer]
    await expect(openStore(file)).rejects.toEqual(code('busy'))
    const reader = await openReader(file)
    opened.push(reader)
    expect(rowsOf(await reader.readings(line.toString().trim(), 'tails-a', 0, T0 * 2))).toEqual([[T0, 1]])
    child.kill('SIGKILL')
    await once(child, 'exit')
    const store = await open(file)
    expect(rowsOf(await store.readings(line.toString().trim(), 'tails-a', 0, T0 * 2))).toEqual([[T0, 1]])
  })

  it('may open again after closing', async () => {
    const file = newFile()
    const first = await openStore(file)
    await expect(openStore(file)).rejects.toEqual(code('busy'))
    await first.close()
    await first.close()
    await open(file)
    await expect(first.sites({ limit: 1 })).rejects.toEqual(code('closed'))
  })
})

describe('a reader beside the writer', () => {
  it('sees what was answered, wherever it rests meanwhile', async () => {
    const file = newFile()
    const store = await open(file)
    const site = (await store.createSite(bakery(), ACT)).id
    const reader = await openReader(file)
    opened.push(reader)
    const rows = regular(200)
    for (let i = 0; i < rows.length; i += 10) {
      await store.append(site, [batch(rows.slice(i, i + 10))])
      if (i % 30 === 0) await store.settle(17)
      expect(rowsOf(await reader.readings(site, 'tails-a', 0, T0 * 2))).toEqual(rows.slice(0, i + 10))
      expect((await reader.trace(site, 'tails-a', T0, T0 + HOUR, 5)).stored).toBe(i + 10)
    }
  })

  it('cannot open what is not there or no data file', async () => {
    await expect(openReader(newFile())).rejects.toThrow()
    const file = newFile()
    writeFileSync(file, 'not a data file at all, only some text that is long enough to be one'.repeat(100))
    await expect(openStore(file)).rejects.toEqual(code('corrupt'))
  })
})

describe('recent rows', () => {
  it('come to rest by themselves when there are many', async () => {
    const file = newFile()
    const store = await open(file)
    const site = (await store.createSite(bakery(), ACT)).id
    // One reading each four minutes: never enough of one hour for a block at once.
    const rows = regular(26_000).map(([t, v], i): [number, number] => [t + 239_000 * i, v])
    for (let i = 0; i < rows.length; i += 2_000) await store.append(site, [batch(rows.slice(i, i + 2_000))])
    const db = new Database(file, { readonly: true })
    const waiting = db.prepare('SELECT count(*) FROM recent').pluck().get()
    db.close()
    expect(waiting).toBeLessThanOrEqual(20_000)
    expect(rowsOf(await store.readings(site, 'tails-a', 0, T0 * 2))).toEqual(rows)
  })
})

describe('a full disk', () => {
  it('refuses the whole call, keeps what was answered, and goes on when there is room', async () => {
    const file = newFile()
    await (await openStore(file)).close()
    const store = await open(file, { maxPages: 120 })
    const site = (await store.createSite(bakery(), ACT)).id
    const noise = (i: number): number => Math.sin(i * i) // no decimals: eight bytes each
    let kept = 0
    const part = (from: number): [number, number][] => {
      return Array.from({ length: 5_000 }, (_, i) => [T0 + 1_000 * (from + i), noise(from + i)])
    }
    const fill = async (): Promise<void> => {
      for (;;) {
        await store.append(site, [batch(part(kept)), batch([[T0 + kept, 1]], 'rain')])
        kept += 5_000
      }
    }
    await expect(fill()).rejects.toEqual(code('disk_full'))
    expect(kept).toBeGreaterThan(0)
    const expected = [...Array(kept).keys()].map((i): [number, number] => [T0 + 1_000 * i, noise(i)])
    expect(rowsOf(await store.readings(site, 'tails-a', 0, T0 * 2))).toEqual(expected)
    expect((await store.extents(site)).map((e) => e.count)).toEqual([kept / 5_000, kept])
    await store.close()
    const roomy = await open(file)
    expect(await roomy.append(site, [batch(part(kept))])).toMatchObject({ stored: 5_000 })
    expect((await roomy.readings(site, 'tails-a', 0, T0 * 2)).t).toHaveLength(kept + 5_000)
  })
})

describe('a damaged block', () => {
  it.each([
    [
      'a flipped bit',
      "UPDATE packed SET data = CAST(substr(data, 1, 20) || x'ff' || substr(data, 22) AS BLOB) WHERE key = ?",
    ],
    ['missing bytes', 'UPDATE packed SET data = substr(data, 1, 30) WHERE key = ?'],
  ])('%s is told with channel and hour; the other hours still read', async (_name, damage) => {
    const file = newFile()
    const before = await openStore(file)
    const site = (await before.createSite(bakery(), ACT)).id
    await before.append(site, [batch(regular(3 * 3_600))])
    await before.close()
    const db = new Database(file)
    const keys = db.prepare<[], number>('SELECT key FROM block ORDER BY key').pluck().all()
    expect(keys).toHaveLength(3)
    db.prepare(damage).run(keys[1])
    db.close()

    const store = await open(file)
    const told = expect.objectContaining({
      code: 'corrupt',
      message: expect.stringMatching(/"tails-a".*2026-09-21T01:00:00/),
    })
    await expect(store.readings(site, 'tails-a', 0, T0 * 2)).rejects.toEqual(told)
    await expect(store.trace(site, 'tails-a', T0, T0 + 3 * HOUR, 500)).rejects.toEqual(told)
    await expect(store.append(site, [batch(regular(40, T0 + HOUR + 1))])).rejects.toEqual(told)
    expect((await store.readings(site, 'tails-a', T0, T0 + HOUR)).t).toHaveLength(3_600)
    expect((await store.readings(site, 'tails-a', T0 + 2 * HOUR, T0 + 3 * HOUR)).t).toHaveLength(3_600)
    expect((await store.extents(site))[0]!.count).toBe(3 * 3_600)
  })

  it('in the way of settling does not stop intake', async () => {
    const file = newFile()
    const before = await openStore(file)
    const site = (await before.createSite(bakery(), ACT)).id
    await before.append(site, [batch(regular(40))])
    await before.close()
    const db = new Database(file)
    db.exec('UPDATE packed SET crc = crc + 1')
    db.close()

    const store = await open(file)
    await store.append(site, [batch([[T0 + HOUR - 1, 1]])])
    await expect(store.settle(10)).rejects.toEqual(code('corrupt'))
    const rows = regular(34_000, T0 + HOUR).map(([t, v], i): [number, number] => [t + 239_000 * i, v])
    for (let i = 0; i < rows.length; i += 2_000) await store.append(site, [batch(rows.slice(i, i + 2_000))])
    expect((await store.readings(site, 'tails-a', T0 + HOUR, T0 * 2)).t).toHaveLength(rows.length)
  })
})
