import fc from 'fast-check'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { SiteSheet } from '../../../core/contract/index.ts'
import type { Series } from '../../../core/timeline/series.ts'
import { traceColumns } from '../../../core/timeline/trace-columns.ts'
import type { Act, ReadingBatch, Store } from '../../../server/store/port.ts'

export const T0 = Date.UTC(2026, 8, 21)
const HOUR = 3_600_000
export const ACT: Act = Object.freeze({ by: 'Anna', at: T0 })

/** A village bakery's board, as far as the store cares: names and channels. */
export function bakery(name = 'Bakery Moser'): SiteSheet {
  return SiteSheet.parse({
    name,
    timeZone: 'Europe/Vienna',
    rcds: [{ ref: 'A', ratedMa: 30 }],
    channels: [
      { ref: 'tails-a', quantity: 'leakage', rcd: 'A' },
      { ref: 'rain', quantity: 'rain' },
    ],
  })
}

export function batch(rows: readonly (readonly [t: number, v: number])[], channel = 'tails-a'): ReadingBatch {
  return { channel, t: Float64Array.from(rows, (r) => r[0]), v: Float64Array.from(rows, (r) => r[1]) }
}

export const rowsOf = ({ t, v }: Series): [number, number][] => [...t].map((time, i) => [time, v[i]!])

const code = (name: string): unknown => expect.objectContaining({ name: 'StoreError', code: name })
const bytes = (fill: number): Uint8Array => new Uint8Array(32).fill(fill)

/** The law of `append` on a plain map: first wins, or with `replace` the last of a post; both zeros are one value. */
function post(model: Map<number, number>, rows: readonly (readonly [number, number])[], replace: boolean): void {
  const posted = new Map<number, number>()
  for (const [t, v] of rows) if (!posted.has(t) || (replace && posted.get(t) !== v)) posted.set(t, v)
  for (const [t, v] of posted) if (!model.has(t) || (replace && model.get(t) !== v)) model.set(t, v)
}

/** What every implementation of the port must do. `open` makes an empty store; the suite closes it. */
export function portSuite(open: () => Promise<Store>): void {
  let store: Store
  beforeAll(async () => {
    store = await open()
  })
  afterAll(async () => {
    await store.close()
  })
  const newSite = async (): Promise<string> => (await store.createSite(bakery(), ACT)).id

  describe('sites', () => {
    it('keeps a sheet, raises the revision and tells the last reading', async () => {
      const made = await store.createSite(bakery(), ACT)
      expect(made).toMatchObject({ sheet: bakery(), createdAt: T0, updatedAt: T0, lastReadingAt: null })
      await store.append(made.id, [batch([[T0 + 5, 1]])])
      const later = await store.updateSite(made.id, bakery('Bakery Huber'), { by: 'Ben', at: T0 + 9 })
      expect(later).toMatchObject({ updatedAt: T0 + 9, lastReadingAt: T0 + 5, sheet: { name: 'Bakery Huber' } })
      expect(later.revision).toBeGreaterThan(made.revision + 1)
      expect(await store.site(made.id)).toEqual(later)
      expect(await store.site('nobody')).toBeUndefined()
      await expect(store.updateSite('nobody', bakery(), ACT)).rejects.toEqual(code('no_such_site'))
    })

    it('raises the revision only when something changed', async () => {
      const id = await newSite()
      const revision = async (): Promise<number> => (await store.site(id))!.revision
      await store.append(id, [batch([[T0, 1]])])
      await store.keep(id, 'trip', [{ rcd: 'A', at: T0 }], ACT)
      const before = await revision()
      await store.append(id, [batch([[T0, 1]])])
      await store.keep(id, 'trip', [{ rcd: 'A', at: T0 }], ACT)
      await store.settle(100)
      expect(await revision()).toBe(before)
    })

    it('pages by key and searches by name, wildcards taken as they are', async () => {
      const names = ['Ölmühle 100%', 'Ölmühle 100 a', 'Ölmühle_b']
      for (const name of names) await store.createSite(bakery(name), ACT)
      const search = async (text: string): Promise<string[]> =>
        (await store.sites({ limit: 50, search: text })).items.map((site) => site.sheet.name)
      expect(await search('öLMÜhle')).toEqual(names)
      expect(await search('100%')).toEqual(['Ölmühle 100%'])
      expect(await search('E_B')).toEqual(['Ölmühle_b'])
      const first = await store.sites({ limit: 2, search: 'ölmühle' })
      expect(first.items).toHaveLength(2)
      const second = await store.sites({ limit: 2, search: 'ölmühle', after: first.next! })
      expect(second.items.map((site) => site.sheet.name)).toEqual(['Ölmühle_b'])
      expect(second.next).toBeNull()
    })

    it('removes a site with all that hangs on it', async () => {
      const id = await newSite()
      await store.append(id, [batch(Array.from({ length: 50 }, (_, i) => [T0 + i, i])), batch([[T0, 1]], 'rain')])
      await store.keep(id, 'trip', [{ rcd: 'A', at: T0 }], ACT)
      await store.addKey({ id: 'gone', site: id, role: 'viewer', label: 'page', hash: bytes(200) }, ACT)
      await store.addSession({ hash: bytes(201), keyId: 'gone', createdAt: T0, expiresAt: T0 + HOUR })
      await store.cacheFindings({ hash: 'gone', site: id, body: '{}', at: T0 })
      expect(await store.deleteSite(id)).toBe(true)
      expect(await store.deleteSite(id)).toBe(false)
      expect(await store.site(id)).toBeUndefined()
      expect(await store.keyByHash(bytes(200))).toBeUndefined()
      expect(await store.sessionKey(bytes(201), T0)).toBeUndefined()
      expect(await store.cachedFindings('gone')).toBeUndefined()
      await expect(store.readings(id, 'tails-a', 0, T0 * 2)).rejects.toEqual(code('no_such_site'))
      expect(rowsOf(await store.readings(await newSite(), 'tails-a', 0, T0 * 2))).toEqual([])
    })
  })

  describe('readings', () => {
    const time = fc.oneof(
      fc.integer({ min: 0, max: 200 }).map((i) => T0 + 1_000 * i),
      fc.integer({ min: 0, max: 3 }).chain((h) => fc.integer({ min: -3, max: 3 }).map((i) => T0 + h * HOUR + i)),
    )
    const value = fc.oneof(
      fc.integer({ min: 0, max: 3 }).map((m) => m / 100),
      fc.constantFrom(-0, 0.1 + 0.2, 5e-324),
    )
    const reading = fc.tuple(time, value)
    const step = fc.oneof(
      { weight: 5, arbitrary: fc.record({ rows: fc.array(reading, { maxLength: 30 }), replace: fc.boolean() }) },
      {
        weight: 2,
        arbitrary: fc.record({ rows: fc.array(reading, { minLength: 40, maxLength: 160 }), replace: fc.boolean() }),
      },
      { weight: 2, arbitrary: fc.record({ settle: fc.integer({ min: 1, max: 60 }) }) },
    )

    it('are sorted and once each, however they came and wherever they rest', async () => {
      await fc.assert(
        fc.asyncProperty(fc.array(step, { maxLength: 12 }), fc.boolean(), async (steps, twoChannels) => {
          const id = await newSite()
          const model = new Map<number, number>()
          let stored = 0
          for (const one of steps) {
            if ('settle' in one) {
              await store.settle(one.settle)
              continue
            }
            const before = model.size
            post(model, one.rows, one.replace)
            const fresh = model.size - before
            const batches = [batch(one.rows)]
            if (twoChannels) batches.push(batch(one.rows.slice(0, 5), 'rain'))
            if (!twoChannels && one.rows.length > 3) {
              batches.splice(0, 1, batch(one.rows.slice(0, 3)), batch(one.rows.slice(3)))
            }
            const report = await store.append(id, batches, { replace: one.replace })
            const posted = batches.reduce((n, b) => n + b.t.length, 0)
            expect(report.stored + report.repeated + report.conflicting).toBe(posted)
            if (!twoChannels && !one.replace) expect(report.stored).toBe(fresh)
            stored += fresh
          }
          const expected = [...model].sort((a, b) => a[0] - b[0])
          const all = await store.readings(id, 'tails-a', 0, T0 * 2)
          expect(rowsOf(all)).toEqual(expected)
          expect(stored).toBe(expected.length)
          const extent = (await store.extents(id)).find((e) => e.channel === 'tails-a')
          expect(extent).toEqual(
            expected.length === 0
              ? undefined
              : { channel: 'tails-a', count: stored, first: expected[0]![0], last: expected.at(-1)![0] },
          )
          for (const [from, to] of [
            [T0 + 50_000, T0 + 150_000],
            [T0, T0 + HOUR],
            [T0 + 1, T0 + 2 * HOUR + 1],
          ] as const) {
            const part = await store.readings(id, 'tails-a', from, to)
            expect(rowsOf(part)).toEqual(expected.filter(([t]) => t >= from && t < to))
            const pieces: [number, number][] = []
            for await (const piece of store.readingPieces(id, 'tails-a', from, to)) pieces.push(...rowsOf(piece))
            expect(pieces).toEqual(rowsOf(part))
          }
        }),
        { numRuns: 120 },
      )
    })

    it('count what is new, what is there and what differs', async () => {
      const id = await newSite()
      const rows = (n: number, v: number): [number, number][] => Array.from({ length: n }, (_, i) => [T0 + i, v])
      for (const n of [10, 100]) {
        const batches = [batch(rows(n, 1))]
        const first = await store.append(id, batches)
        expect(first.stored + first.repeated).toBe(n)
        expect(await store.append(id, batches)).toEqual({ stored: 0, repeated: n, conflicting: 0 })
        expect(await store.append(id, [batch(rows(n, 2))])).toEqual({ stored: 0, repeated: 0, conflicting: n })
        expect((await store.readings(id, 'tails-a', T0, T0 + n)).v.every((v) => v === 1)).toBe(true)
        expect(await store.append(id, [batch(rows(n, 2))], { replace: true })).toMatchObject({ stored: n })
        expect((await store.readings(id, 'tails-a', T0, T0 + n)).v.every((v) => v === 2)).toBe(true)
        await store.append(id, [batch(rows(n, 1))], { replace: true })
      }
      expect(await store.append(id, [])).toEqual({ stored: 0, repeated: 0, conflicting: 0 })
    })

    it('leave the given arrays alone', async () => {
      const id = await newSite()
      const given = batch([
        [T0 + 2, 1],
        [T0, 2],
        [T0 + 2, 3],
      ])
      await store.append(id, [given])
      expect([...given.t, ...given.v]).toEqual([T0 + 2, T0, T0 + 2, 1, 2, 3])
    })

    it('refuse a channel that is not on the sheet, and keep none of that call', async () => {
      const id = await newSite()
      await expect(store.append(id, [batch([[T0, 1]]), batch([[T0, 1]], 'attic')])).rejects.toEqual(
        code('no_such_channel'),
      )
      await expect(store.append('nobody', [])).rejects.toEqual(code('no_such_site'))
      expect(await store.extents(id)).toEqual([])
      expect(rowsOf(await store.readings(id, 'attic', 0, T0 * 2))).toEqual([])
    })

    it('stay when their channel leaves the sheet', async () => {
      const id = await newSite()
      await store.append(id, [batch([[T0, 1]], 'rain')])
      const sheet = bakery()
      await store.updateSite(id, { ...sheet, channels: sheet.channels.filter((c) => c.ref !== 'rain') }, ACT)
      expect(rowsOf(await store.readings(id, 'rain', 0, T0 * 2))).toEqual([[T0, 1]])
      await expect(store.append(id, [batch([[T0 + 1, 1]], 'rain')])).rejects.toEqual(code('no_such_channel'))
    })

    it('come in pieces of bounded size', async () => {
      const id = await newSite()
      const n = 150_000
      const t = Float64Array.from({ length: n }, (_, i) => T0 + 20 * i)
      await store.append(id, [{ channel: 'tails-a', t, v: t.map((x) => (x % 1_000) / 100) }])
      let next = 0
      for await (const piece of store.readingPieces(id, 'tails-a', 0, T0 * 2)) {
        expect(piece.t.length).toBeLessThanOrEqual(65_536)
        expect(piece.t[0]).toBe(t[next])
        next += piece.t.length
      }
      expect(next).toBe(n)
    })
  })

  describe('trace', () => {
    it('gives the columns of all readings at any zoom', async () => {
      const id = await newSite()
      const n = 40_000
      const gap = (i: number): number => (i > 25_000 ? 20 * HOUR : 0)
      const t = Float64Array.from({ length: n }, (_, i) => T0 + 10_000 * i + gap(i))
      const v = t.map((_, i) => Math.round(1_000 + 300 * Math.sin(i / 5_000) + ((i * 7_919) % 101)) / 100)
      await store.append(id, [{ channel: 'tails-a', t, v }])
      await store.append(id, [
        batch([
          [T0 + 5, 99],
          [T0 + 30 * HOUR + 5, -99],
        ]),
      ])
      const all = await store.readings(id, 'tails-a', 0, T0 * 2)
      const end = t[n - 1]! + 1
      await fc.assert(
        fc.asyncProperty(
          fc.integer({ min: -HOUR, max: 100 * HOUR }),
          fc.integer({ min: 1, max: 140 * HOUR }),
          fc.integer({ min: 1, max: 300 }),
          async (start, width, columns) => {
            const from = T0 + start
            const trace = await store.trace(id, 'tails-a', from, from + width, columns)
            const wanted = traceColumns(all, from, from + width, columns)
            expect(rowsOf(trace)).toEqual(rowsOf(wanted))
            const inside = all.t.filter((time) => time >= from && time < from + width).length
            expect(trace.stored).toBe(inside)
            expect(trace.exact).toBe(inside <= 4 * columns)
          },
        ),
        { numRuns: 60 },
      )
      const wide = await store.trace(id, 'tails-a', T0, end, 10)
      expect(wide.v.filter(Number.isNaN)).toHaveLength(1)
    })

    it('is empty and exact where nothing is stored', async () => {
      const id = await newSite()
      const trace = await store.trace(id, 'tails-a', T0, T0 + HOUR, 100)
      expect({ ...trace, t: [...trace.t], v: [...trace.v] }).toEqual({ t: [], v: [], exact: true, stored: 0 })
    })
  })

  describe('records', () => {
    it('are kept once, in order, and found by the time they touch', async () => {
      const id = await newSite()
      const night = { rcd: 'A', after: T0, before: T0 + 8 * HOUR }
      const noon = { rcd: 'A', at: T0 + 12 * HOUR, note: 'mixer on' }
      const first = await store.keep(id, 'trip', [noon, night, noon], ACT)
      expect(first).toMatchObject({ stored: 2, repeated: 1 })
      expect(first.ids[2]).toBe(first.ids[0])
      // The same content with its fields in another order is the same trip.
      const again = await store.keep(id, 'trip', [{ note: 'mixer on', at: noon.at, rcd: 'A' }], ACT)
      expect(again).toEqual({ stored: 0, repeated: 1, ids: [first.ids[0]] })
      const found = async (from?: number, to?: number): Promise<unknown[]> =>
        (await store.records(id, 'trip', { limit: 10, from, to })).items.map((item) => item.body)
      expect(await found()).toEqual([night, noon])
      expect(await found(T0 + 4 * HOUR, T0 + 5 * HOUR)).toEqual([night])
      expect(await found(T0 + 9 * HOUR, T0 + 12 * HOUR)).toEqual([])
      expect(await found(T0 + 12 * HOUR, T0 + 12 * HOUR + 1)).toEqual([noon])
      expect((await store.records(id, 'switching', { limit: 10 })).items).toEqual([])
      expect(await store.record(id, 'trip', first.ids[1]!)).toEqual({
        id: first.ids[1],
        kind: 'trip',
        body: night,
        recordedAt: T0,
        recordedBy: 'Anna',
        corrections: 0,
      })
    })

    it('a timetable counts while it holds, for ever when nothing ends it', async () => {
      const id = await newSite()
      const days = ['mon'] as ['mon']
      const always = { of: 'load:oven', onBetween: ['02:00', '05:00'] as [string, string], days }
      const once = { ...always, from: T0, until: T0 + HOUR }
      await store.keep(id, 'timetable', [always, once], ACT)
      const count = async (from: number, to: number): Promise<number> =>
        (await store.records(id, 'timetable', { limit: 10, from, to })).items.length
      expect(await count(T0, T0 + 1)).toBe(2)
      expect(await count(T0 + HOUR, T0 + 2 * HOUR)).toBe(1)
      expect(await count(T0 - HOUR, T0)).toBe(1)
    })

    it('page by time and id without losing or doubling any, also while others come', async () => {
      const id = await newSite()
      const at = (i: number): number => T0 + Math.floor(i / 7) * HOUR
      const bodies = Array.from({ length: 40 }, (_, i) => ({ of: `load:l${i}`, at: at(i), on: i % 2 === 0 }))
      await store.keep(id, 'switching', bodies, ACT)
      const seen: string[] = []
      let after: string | undefined
      for (;;) {
        const page = await store.records(id, 'switching', { limit: 6, after })
        seen.push(...page.items.map((item) => item.body.of))
        if (seen.length === 12) await store.keep(id, 'switching', [{ of: 'load:early', at: T0 - HOUR, on: true }], ACT)
        if (page.next === null) break
        after = page.next
      }
      expect(seen.toSorted()).toEqual(bodies.map((b) => b.of).toSorted())
    })

    it('keep who corrected what, and know the original again', async () => {
      const id = await newSite()
      const original = { rcd: 'A', at: T0 }
      const moved = { rcd: 'A', at: T0 + HOUR }
      const { ids } = await store.keep(id, 'trip', [original], ACT)
      const trip = ids[0]!
      const corrected = await store.correct(id, 'trip', trip, moved, { by: 'Ben', at: T0 + 1 })
      expect(corrected).toMatchObject({ body: moved, corrections: 1, recordedBy: 'Anna' })
      expect(await store.correct(id, 'trip', trip, moved, ACT)).toMatchObject({ corrections: 1 })
      expect(await store.correct(id, 'trip', 'nobody', moved, ACT)).toBeUndefined()
      expect(await store.correct(id, 'remedy', trip, { at: T0, done: 'x' }, ACT)).toBeUndefined()
      expect(await store.keep(id, 'trip', [original, moved], ACT)).toEqual({
        stored: 0,
        repeated: 2,
        ids: [trip, trip],
      })
      expect(await store.remove(id, 'trip', trip, { by: 'Eva', at: T0 + 2 })).toBe(true)
      expect(await store.remove(id, 'trip', trip, ACT)).toBe(false)
      expect(await store.record(id, 'trip', trip)).toBeUndefined()
      expect(await store.corrections(id, 'trip', trip)).toEqual([
        { at: T0 + 1, by: 'Ben', action: 'changed', before: original },
        { at: T0 + 2, by: 'Eva', action: 'deleted', before: moved },
      ])
      const anew = await store.keep(id, 'trip', [original], ACT)
      expect(anew.stored).toBe(1)
      expect(anew.ids[0]).not.toBe(trip)
    })

    it('belong to one site', async () => {
      const [here, there] = [await newSite(), await newSite()]
      const { ids } = await store.keep(here, 'trip', [{ rcd: 'A', at: T0 }], ACT)
      expect(await store.record(there, 'trip', ids[0]!)).toBeUndefined()
      expect(await store.correct(there, 'trip', ids[0]!, { rcd: 'A', at: T0 + 1 }, ACT)).toBeUndefined()
      expect(await store.remove(there, 'trip', ids[0]!, ACT)).toBe(false)
      await expect(store.keep('nobody', 'trip', [], ACT)).rejects.toEqual(code('no_such_site'))
    })
  })

  describe('keys and sessions', () => {
    it('are found by hash until they end', async () => {
      const id = await newSite()
      expect(await store.hasOwnerKey()).toBe(false)
      await store.addKey({ id: 'own', site: null, role: 'owner', label: 'owner', hash: bytes(1) }, ACT)
      await store.addKey({ id: 'log', site: id, role: 'logger', label: 'board', hash: bytes(2) }, ACT)
      expect(await store.hasOwnerKey()).toBe(true)
      expect(await store.keyByHash(bytes(1))).toMatchObject({ id: 'own', site: null, role: 'owner' })
      expect(await store.keyByHash(bytes(9))).toBeUndefined()
      const logger = {
        id: 'log',
        site: id,
        role: 'logger',
        label: 'board',
        createdAt: T0,
        lastUsedAt: null,
        endedAt: null,
      }
      expect(await store.keys(id)).toEqual([logger])
      await store.addSession({ hash: bytes(3), keyId: 'log', createdAt: T0, expiresAt: T0 + HOUR })
      expect(await store.sessionKey(bytes(3), T0 + 1)).toEqual(logger)
      expect(await store.sessionKey(bytes(3), T0 + HOUR)).toBeUndefined()
      await store.touchKey('log', T0 + 7)
      await store.touchKey('nobody', T0)
      expect((await store.keys(id))[0]!.lastUsedAt).toBe(T0 + 7)
      expect(await store.endKey('nobody', 'log', ACT).catch((e: { code: string }) => e.code)).toBe('no_such_site')
      expect(await store.endKey(await newSite(), 'log', ACT)).toBe(false)
      expect(await store.endKey(id, 'log', { by: 'owner', at: T0 + 8 })).toBe(true)
      expect(await store.endKey(id, 'log', ACT)).toBe(false)
      expect(await store.keyByHash(bytes(2))).toMatchObject({ endedAt: T0 + 8 })
      expect(await store.sessionKey(bytes(3), T0 + 9)).toBeUndefined()
    })

    it('end a session alone', async () => {
      await store.addKey({ id: 'p', site: null, role: 'owner', label: 'page', hash: bytes(20) }, ACT)
      await store.addSession({ hash: bytes(21), keyId: 'p', createdAt: T0, expiresAt: T0 + HOUR })
      await store.endSession(bytes(21))
      expect(await store.sessionKey(bytes(21), T0)).toBeUndefined()
      expect(await store.keyByHash(bytes(20))).toMatchObject({ endedAt: null })
    })
  })

  describe('cached findings', () => {
    it('come back by their hash; the oldest of many make room', async () => {
      const [id, other] = [await newSite(), await newSite()]
      await store.cacheFindings({ hash: 'other', site: other, body: 'kept', at: T0 })
      for (let i = 0; i < 230; i++) await store.cacheFindings({ hash: `h${i}`, site: id, body: `${i}`, at: T0 + i })
      expect(await store.cachedFindings('h229')).toBe('229')
      expect(await store.cachedFindings('h0')).toBeUndefined()
      expect(await store.cachedFindings('other')).toBe('kept')
      expect(await store.cachedFindings('nothing')).toBeUndefined()
    })
  })
}
