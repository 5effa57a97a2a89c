import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Store } from '../../../server/store/port.ts'
import { ACT, bakery, bytes, code, HOUR, T0 } from './bakery.ts'

/** What every implementation of the port must do with records, keys and kept findings. `open` makes an empty store; the suite closes it. */
export function recordsSuite(open: () => Promise<Store>): void {
  let store: Store
  beforeAll(async () => {
    store = await open()
  })
  afterAll(async () => {
    await store.close()
  })
  const newSite = async (): Promise<string> => (await store.createSite(bakery(), ACT)).id

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
