import fc from 'fast-check'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { traceColumns } from '../../../core/timeline/trace-columns.ts'
import type { Store } from '../../../server/store/port.ts'
import { ACT, bakery, batch, bytes, code, HOUR, rowsOf, T0 } from './bakery.ts'

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
}
