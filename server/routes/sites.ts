import type { FastifyPluginAsyncZod } from 'fastify-type-provider-zod'
import { z } from 'zod'
import { pageOf, SiteOut, SiteSheet, SiteSheetPatch, SiteSummary, writeInstant } from '../../core/contract/index.ts'
import { check } from '../intake/check.ts'
import type { SiteRecord } from '../store/port.ts'
import { SiteParams } from './params.ts'
import { pageFields } from './query.ts'
import { actOf, callerOf, noSuchSite, type Rooms, siteOf } from './shared.ts'

/** Site sheets. */
export function sitesRoutes({ store, live, now }: Rooms): FastifyPluginAsyncZod {
  return async (app) => {
    app.post(
      '/sites',
      {
        config: { access: ['owner'] },
        schema: {
          summary: 'Make a site',
          tags: ['sites'],
          body: SiteSheet,
          response: { 201: SiteOut },
        },
      },
      async (request, reply) => {
        const site = await store.createSite(request.body, actOf(request, now))
        return reply.code(201).header('location', `/api/sites/${site.id}`).send(siteOut(site))
      },
    )

    app.get(
      '/sites',
      {
        config: { access: ['owner', 'viewer'] },
        schema: {
          summary: 'List sites: the owner all, a viewer its own',
          tags: ['sites'],
          querystring: z.object({ ...pageFields, search: z.string().max(120).optional() }),
          response: { 200: pageOf(SiteSummary) },
        },
      },
      async (request) => {
        const { key } = callerOf(request)
        const { items, next } =
          key.site === null ? await store.sites(request.query) : { items: [await siteOf(store, key.site)], next: null }
        const open = await store.alerts.openCounts(items.map(({ id }) => id))
        return { items: items.map((site) => siteSummary(site, open.get(site.id) ?? 0)), next }
      },
    )

    app.get(
      '/sites/:site',
      {
        config: { access: ['owner', 'viewer'] },
        schema: { summary: 'A site sheet', tags: ['sites'], params: SiteParams, response: { 200: SiteOut } },
      },
      async (request) => siteOut(await siteOf(store, request.params.site)),
    )

    app.patch(
      '/sites/:site',
      {
        config: { access: ['owner'] },
        schema: {
          summary: 'Change a site sheet',
          description:
            'Each field given replaces that field whole; null takes an optional one away. Channels that leave the sheet keep their readings.',
          tags: ['sites'],
          params: SiteParams,
          body: SiteSheetPatch,
          response: { 200: SiteOut },
        },
      },
      async (request) => {
        const { site } = request.params
        const before = await siteOf(store, site)
        const fields = Object.entries({ ...before.sheet, ...request.body }).filter(([, value]) => value !== null)
        const sheet = check(SiteSheet, Object.fromEntries(fields))
        const after = await store.updateSite(site, sheet, actOf(request, now))
        live.tell(site, { kind: 'sheet' })
        return siteOut(after)
      },
    )

    app.delete(
      '/sites/:site',
      {
        config: { access: ['owner'] },
        schema: {
          summary: 'Remove a site with all that hangs on it',
          tags: ['sites'],
          params: SiteParams,
          response: { 204: z.undefined() },
        },
      },
      async (request, reply) => {
        if (!(await store.deleteSite(request.params.site))) throw noSuchSite()
        live.endSite(request.params.site)
        return reply.code(204).send()
      },
    )
  }
}

function siteOut({ id, sheet, createdAt, updatedAt }: SiteRecord): SiteOut {
  return { ...sheet, id, createdAt: writeInstant(createdAt), updatedAt: writeInstant(updatedAt) }
}

function siteSummary({ id, sheet, updatedAt, lastReadingAt }: SiteRecord, openMatters: number): SiteSummary {
  return {
    id,
    name: sheet.name,
    timeZone: sheet.timeZone,
    rcds: sheet.rcds.length,
    channels: sheet.channels.length,
    lastReadingAt: lastReadingAt === null ? null : writeInstant(lastReadingAt),
    openMatters,
    updatedAt: writeInstant(updatedAt),
  }
}
