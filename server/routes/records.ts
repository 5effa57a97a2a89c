import { isDeepStrictEqual } from 'node:util'
import type { FastifyPluginAsyncZod } from 'fastify-type-provider-zod'
import { z } from 'zod'
import {
  Correction,
  type KeyRole,
  Posted,
  pageOf,
  type RecordBodies,
  type RecordKind,
  SwitchingIn,
  SwitchingsIn,
  type Trip,
  writeInstant,
} from '../../core/contract/index.ts'
import { outagesSpan, overlapNotes } from '../intake/overlaps.ts'
import { changedRecord, MAX_RECORDS_PER_BODY, RECORD_IN, takeRecords } from '../intake/records.ts'
import { ProblemError } from '../plugins/problem-error.ts'
import type { Page, StoredRecord } from '../store/port.ts'
import { SiteAndIdParams, SiteParams } from './params.ts'
import { inOrder, OUT_OF_ORDER, pageFields, spanFields } from './query.ts'
import { actOf, type Rooms, siteOf } from './shared.ts'

/** One kind of record as the API shows it. */
export interface RecordResource<K extends RecordKind> {
  readonly kind: K
  /** `trips`, `switchings`, … */
  readonly path: string
  /** "a trip", for summaries. */
  readonly one: string
  readonly out: z.ZodType
  readonly mayPost: readonly KeyRole[]
}

const PostedRecords = Posted.extend({
  notes: z.array(z.string()).optional().meta({ description: 'what the person who posted should know' }),
})

/** Posting, listing, correcting one kind of record. */
export function recordRoutes<K extends RecordKind>(
  { store, live, now }: Rooms,
  { kind, path, one, out, mayPost }: RecordResource<K>,
): FastifyPluginAsyncZod {
  const tags = ['records']
  const collection = `/sites/:site/${path}`
  const item = `${collection}/:id`

  return async (app) => {
    app.post(
      collection,
      {
        config: { access: mayPost, describedBody: { 'application/json': bodySchema(kind) } },
        schema: {
          summary: `Post ${path}: one object or a list`,
          description:
            '201 when something is new, 200 when all of it was there already. A list is taken whole or not at all.',
          tags,
          params: SiteParams,
          response: { 200: PostedRecords, 201: PostedRecords },
        },
      },
      async (request, reply) => {
        const { id, sheet } = await siteOf(store, request.params.site)
        const bodies = takeRecords(kind, request.body, sheet)
        const report = await store.keep(id, kind, bodies, actOf(request, now))
        if (report.stored > 0) live.tell(id, { kind: 'records', record: kind })
        const notes = kind === 'trip' ? await notesOn(id, bodies as Trip[], report.ids) : []
        const { stored, repeated, ids } = report
        reply.code(stored > 0 ? 201 : 200)
        return { stored, repeated, ids: [...ids], ...(notes.length > 0 ? { notes } : {}) }
      },
    )

    app.get(
      collection,
      {
        config: { access: ['owner', 'viewer'] },
        schema: {
          summary: `List ${path} in order of time`,
          tags,
          params: SiteParams,
          querystring: z.object({ ...spanFields, ...pageFields }).refine(inOrder, OUT_OF_ORDER),
          response: { 200: pageOf(out) },
        },
      },
      async (request) => {
        const { id } = await siteOf(store, request.params.site)
        const { items, next } = await store.records(id, kind, request.query)
        return { items: items.map(recordOut), next }
      },
    )

    app.get(
      item,
      {
        config: { access: ['owner', 'viewer'] },
        schema: { summary: `Read ${one}`, tags, params: SiteAndIdParams, response: { 200: out } },
      },
      async (request) => recordOut(await recordOf(request.params)),
    )

    app.get(
      `${item}/corrections`,
      {
        config: { access: ['owner', 'viewer'] },
        schema: {
          summary: `Who corrected ${one}, when, and what stood there before`,
          tags,
          params: SiteAndIdParams,
          response: { 200: pageOf(Correction) },
        },
      },
      async (request) => {
        const { site, id } = request.params
        await siteOf(store, site)
        const corrections = await store.corrections(site, kind, id)
        if (corrections.length === 0) await recordOf(request.params)
        const items = corrections.map(({ at, by, action, before }) => ({
          at: writeInstant(at),
          by,
          action,
          before: withTimes(before),
        }))
        return { items, next: null }
      },
    )

    app.patch(
      item,
      {
        config: {
          access: ['owner'],
          describedBody: { 'application/json': z.record(z.string(), z.unknown()).meta({ description: CHANGE }) },
        },
        schema: {
          summary: `Correct ${one}`,
          description:
            'The fields given replace those stored, null takes one away; the whole is checked again. The correction keeps who, when and what stood there.',
          tags,
          params: SiteAndIdParams,
          response: { 200: out },
        },
      },
      async (request) => {
        const { site, id } = request.params
        const { sheet } = await siteOf(store, site)
        const before = await recordOf(request.params)
        const body = changedRecord(kind, before.body, request.body, sheet)
        if (isDeepStrictEqual(body, before.body)) return recordOut(before)
        const after = await store.correct(site, kind, id, body, actOf(request, now))
        if (after === undefined) throw noSuchRecord()
        live.tell(site, { kind: 'records', record: kind })
        return recordOut(after)
      },
    )

    app.delete(
      item,
      {
        config: { access: ['owner'] },
        schema: {
          summary: `Take ${one} back; its corrections stay`,
          tags,
          params: SiteAndIdParams,
          response: { 204: z.undefined() },
        },
      },
      async (request, reply) => {
        const { site, id } = request.params
        await siteOf(store, site)
        if (!(await store.remove(site, kind, id, actOf(request, now)))) throw noSuchRecord()
        live.tell(site, { kind: 'records', record: kind })
        return reply.code(204).send()
      },
    )
  }

  async function recordOf({ site, id }: { readonly site: string; readonly id: string }): Promise<StoredRecord<K>> {
    await siteOf(store, site)
    const record = await store.record(site, kind, id)
    if (record === undefined) throw noSuchRecord()
    return record
  }

  async function notesOn(site: string, trips: readonly Trip[], ids: readonly string[]): Promise<string[]> {
    const span = outagesSpan(trips)
    if (span === null) return []
    const items: StoredRecord<'trip'>[] = []
    let after: string | undefined
    do {
      const query = { from: span.from - LONGEST_OUTAGE_MS, to: span.to, after, limit: 1_000 }
      const page: Page<StoredRecord<'trip'>> = await store.records(site, 'trip', query)
      items.push(...page.items)
      after = page.next ?? undefined
    } while (after !== undefined && items.length < MOST_COMPARED)
    return overlapNotes(items, new Set(ids))
  }
}

/** A trip is listed by when it happened; so far back one is asked for that may still last. */
const LONGEST_OUTAGE_MS = 31 * 86_400_000
const MOST_COMPARED = 20_000
const CHANGE = 'Any of the fields as they are posted; null takes one away.'

function noSuchRecord(): ProblemError {
  return new ProblemError('not-found', 'There is no such record.')
}

function bodySchema(kind: RecordKind): z.ZodType {
  const one: z.ZodType = RECORD_IN[kind]
  const list = z.array(one).max(MAX_RECORDS_PER_BODY)
  return kind === 'switching' ? z.union([SwitchingsIn, SwitchingIn, list]) : z.union([one, list])
}

/** A stored record as it is answered: times in RFC 3339. */
function recordOut<K extends RecordKind>(record: StoredRecord<K>): Record<string, unknown> {
  const { id, body, recordedAt, recordedBy, corrections } = record
  return { ...withTimes(body), id, recordedAt: writeInstant(recordedAt), recordedBy, corrections }
}

const TIMES = new Set(['at', 'after', 'before', 'restoredAt', 'from', 'until'])

function withTimes(body: RecordBodies[RecordKind] | Readonly<Record<string, unknown>>): Record<string, unknown> {
  return Object.fromEntries(
    Object.entries(body).map(([name, value]) => [
      name,
      TIMES.has(name) && typeof value === 'number' ? writeInstant(value) : value,
    ]),
  )
}
