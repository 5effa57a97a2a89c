import { randomUUID } from 'node:crypto'
import type { FastifyPluginAsyncZod } from 'fastify-type-provider-zod'
import { z } from 'zod'
import { KeyIn, KeyMade, KeyOut, pageOf, writeInstant } from '../../core/contract/index.ts'
import { hashOf, makeSecret } from '../plugins/callers.ts'
import { ProblemError } from '../plugins/problem-error.ts'
import type { KeyRecord } from '../store/port.ts'
import { SiteAndIdParams, SiteParams } from './params.ts'
import { actOf, type Rooms, siteOf } from './shared.ts'

/** The keys of a site. */
export function keysRoutes({ store, live, now }: Rooms): FastifyPluginAsyncZod {
  return async (app) => {
    app.post(
      '/sites/:site/keys',
      {
        config: { access: ['owner'] },
        schema: {
          summary: 'Make a key; it is shown this once',
          tags: ['keys'],
          params: SiteParams,
          body: KeyIn,
          response: { 201: KeyMade },
        },
      },
      async (request, reply) => {
        const site = await siteOf(store, request.params.site)
        const { role, label } = request.body
        const id = randomUUID()
        const key = makeSecret(role)
        await store.addKey({ id, site: site.id, role, label, hash: hashOf(key) }, actOf(request, now))
        return reply.code(201).send({ id, key, role, label })
      },
    )

    app.get(
      '/sites/:site/keys',
      {
        config: { access: ['owner'] },
        schema: {
          summary: 'The keys of a site, ended ones too, with when each was last used',
          tags: ['keys'],
          params: SiteParams,
          response: { 200: pageOf(KeyOut) },
        },
      },
      async (request) => {
        const site = await siteOf(store, request.params.site)
        return { items: (await store.keys(site.id)).map(keyOut), next: null }
      },
    )

    app.delete(
      '/sites/:site/keys/:id',
      {
        config: { access: ['owner'] },
        schema: {
          summary: 'End a key at once',
          tags: ['keys'],
          params: SiteAndIdParams,
          response: { 204: z.undefined() },
        },
      },
      async (request, reply) => {
        const { site, id } = request.params
        await siteOf(store, site)
        if (!(await store.endKey(site, id, actOf(request, now)))) {
          throw new ProblemError('not-found', 'There is no such key, or it has ended.')
        }
        live.endKey(id)
        return reply.code(204).send()
      },
    )
  }
}

function keyOut({ id, role, label, createdAt, lastUsedAt, endedAt }: KeyRecord): KeyOut {
  if (role === 'owner') throw new Error('the owner key hangs on no site')
  return {
    id,
    role,
    label,
    createdAt: writeInstant(createdAt),
    lastUsedAt: lastUsedAt === null ? null : writeInstant(lastUsedAt),
    endedAt: endedAt === null ? null : writeInstant(endedAt),
  }
}
