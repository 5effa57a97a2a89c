import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import fc from 'fast-check'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { findings } from '../../../core/findings/findings.ts'
import type { Evidence } from '../../../core/timeline/evidence.ts'
import { loadEvidence } from '../../../server/analysis/load-evidence.ts'
import type { ReadingBatch, Store } from '../../../server/store/port.ts'
import { openStore } from '../../../server/store/sqlite/index.ts'
import { LAW_SEEDS, madeSite } from './laws-site.ts'

const folder = mkdtempSync(join(tmpdir(), 'leaktide-laws-'))
let store: Store

beforeAll(async () => {
  store = await openStore(join(folder, 'leaktide.db'))
})
afterAll(async () => {
  await store.close()
  rmSync(folder, { recursive: true, force: true })
})

/** Series cut into pieces at random places, and the pieces mixed. */
function pieces(evidence: Evidence, cuts: readonly number[], order: readonly number[]): ReadingBatch[] {
  const all = [...evidence.series].flatMap(([channel, { t, v }]) => {
    const edges = [0, ...cuts.map((share) => Math.floor(share * t.length)), t.length].sort((a, b) => a - b)
    return edges.slice(1).map((end, i) => ({ channel, t: t.subarray(edges[i]!, end), v: v.subarray(edges[i]!, end) }))
  })
  const rank = (i: number): number => order[i % order.length]! + i / 1e6
  return all
    .map((piece, i) => ({ piece, at: rank(i) }))
    .sort((a, b) => a.at - b.at)
    .map(({ piece }) => piece)
}

describe('findings from the store', () => {
  it('are those of the evidence, however it came in: readings in any pieces, records in any order', async () => {
    const arrival = fc.record({
      seed: fc.constantFrom(...LAW_SEEDS),
      cuts: fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { minLength: 1, maxLength: 6 }),
      order: fc.array(fc.integer(), { minLength: 3, maxLength: 9 }),
      again: fc.boolean(),
    })
    await fc.assert(
      fc.asyncProperty(arrival, async ({ seed, cuts, order, again }) => {
        const { evidence, found } = madeSite(seed)
        const act = { by: 'laws', at: evidence.from }
        const { id } = await store.createSite(evidence.sheet, act)
        const batches = pieces(evidence, cuts, order)
        for (const batch of batches) await store.append(id, [batch])
        if (again) await store.append(id, batches.slice(0, 2))
        const mixed = <T>(list: readonly T[]): T[] =>
          list
            .map((item, i) => ({ item, at: order[i % order.length]! }))
            .sort((a, b) => a.at - b.at)
            .map(({ item }) => item)
        const bodies = <T extends { readonly id: string }>(list: readonly T[]): Omit<T, 'id'>[] =>
          mixed(list).map(({ id: _, ...body }) => body)
        await store.keep(id, 'trip', bodies(evidence.trips), act)
        await store.keep(id, 'switching', bodies(evidence.switchings), act)
        await store.keep(id, 'test', bodies(evidence.tests) as never, act)
        const site = (await store.site(id))!
        const loaded = await loadEvidence(store, { site, rcd: 'A', from: evidence.from, to: evidence.to })
        expect(new Set(loaded.series.keys())).toEqual(new Set(evidence.series.keys()))
        const given = JSON.stringify(findings(loaded))
        const ids = new Map(loaded.trips.map((trip, i) => [trip.id, evidence.trips[i]!.id]))
        expect(JSON.parse(given, (key, value) => (key === 'id' ? (ids.get(value as string) ?? value) : value))).toEqual(
          JSON.parse(JSON.stringify(found)),
        )
      }),
      { numRuns: 4 },
    )
  })
})
