import type { FastifyPluginAsyncZod } from 'fastify-type-provider-zod'
import { z } from 'zod'
import {
  AlertSettings,
  AlertSettingsIn,
  AlertSettingsOut,
  DeliveryOut,
  MatterOut,
  NO_ALERTS,
  pageOf,
  writeInstant,
} from '../../core/contract/index.ts'
import { tellTest } from '../alerts/alerts.ts'
import { waysOf } from '../alerts/plan.ts'
import { whyNotCallable } from '../alerts/webhook.ts'
import { Refused } from '../intake/refused.ts'
import type { AlertSettingsRecord, DeliveryRecord, DeliveryState, MatterRecord } from '../store/alert-port.ts'
import { SiteParams } from './params.ts'
import { pageFields } from './query.ts'
import { actOf, type Rooms, siteOf } from './shared.ts'

const tags = ['alerts']
const MattersQuery = z.object({
  ...pageFields,
  open: z.enum(['true', 'false']).optional().meta({ description: 'true: only what lasts; false: only what is over' }),
})

/** What a site wants to be told, what was noticed, and who was told. */
export function alertsRoutes({ store, alerts, alertServer, now }: Rooms): FastifyPluginAsyncZod {
  const settingsOut = (kept: AlertSettingsRecord | undefined): AlertSettingsOut => {
    const { webhook, ...rest } = kept?.settings ?? NO_ALERTS
    return {
      ...rest,
      webhook: webhook && { url: webhook.url, hasSecret: kept?.secret != null },
      emailReady: alertServer.smtp !== undefined,
    }
  }

  return async (app) => {
    app.get(
      '/sites/:site/alerts',
      {
        config: { access: ['owner'] },
        schema: {
          summary: 'What a site wants to be told, and how',
          tags,
          params: SiteParams,
          response: { 200: AlertSettingsOut },
        },
      },
      async (request) => {
        const { id } = await siteOf(store, request.params.site)
        return settingsOut(await store.alerts.settings(id))
      },
    )

    app.put(
      '/sites/:site/alerts',
      {
        config: { access: ['owner'] },
        schema: {
          summary: 'Set what a site wants to be told, and how',
          description:
            'Replaces the settings whole; what is left out takes its default. Only the secret of the webhook stays when it is left out. ' +
            'A webhook gets a POST with Leaktide-Message (the same on every attempt), Leaktide-Timestamp (s) and ' +
            'Leaktide-Signature: "v1=" and the HMAC-SHA256 of timestamp, "." and body in hexadecimal digits. ' +
            'What is not answered by 2xx is sent again, after waits that double up to six hours, for about a week.',
          tags,
          params: SiteParams,
          body: AlertSettingsIn,
          response: { 200: AlertSettingsOut },
        },
      },
      async (request) => {
        const { id, sheet } = await siteOf(store, request.params.site)
        const before = await store.alerts.settings(id)
        const { webhook, ...rest } = request.body
        const settings = AlertSettings.parse({ ...rest, webhook: webhook && { url: webhook.url } })
        const secret = webhook === null ? null : (webhook.secret ?? before?.secret ?? null)
        if (webhook !== null) {
          const why = whyNotCallable(webhook.url, alertServer.webhookHosts)
          if (why !== undefined) throw new Refused('The body does not fit.', [{ path: '/webhook/url', why }])
          if (secret === null) {
            throw new Refused('The body does not fit.', [
              { path: '/webhook/secret', why: 'a webhook needs a secret, so that its receiver can tell who calls' },
            ])
          }
        }
        if (settings.quiet !== null && settings.quiet.from === settings.quiet.to) {
          throw new Refused('The body does not fit.', [{ path: '/quiet/to', why: 'quiet hours end when they begin' }])
        }
        if (settings.level.hysteresis >= settings.level.share) {
          throw new Refused('The body does not fit.', [
            { path: '/level/hysteresis', why: 'must be less than the share, or a level would never be over' },
          ])
        }
        const channels = new Set(sheet.channels.map(({ ref }) => ref))
        const unknown = Object.keys(settings.silence.everySeconds).filter((ref) => !channels.has(ref))
        if (unknown.length > 0) {
          throw new Refused(
            'The body does not fit.',
            unknown.map((ref) => ({
              path: `/silence/everySeconds/${ref}`,
              why: `there is no channel "${ref}" on the sheet of this site`,
            })),
          )
        }
        await store.alerts.saveSettings(id, { settings, secret }, actOf(request, now))
        alerts.changed(id)
        return settingsOut(await store.alerts.settings(id))
      },
    )

    app.post(
      '/sites/:site/alerts/test',
      {
        config: { access: ['owner'], describedBody: { 'application/json': z.object({}) } },
        schema: {
          summary: 'Send a test message by every way that is set',
          tags,
          params: SiteParams,
          response: { 200: z.object({ message: z.string(), deliveries: z.int() }) },
        },
      },
      async (request) => {
        const { id } = await siteOf(store, request.params.site)
        const settings = (await store.alerts.settings(id))?.settings ?? NO_ALERTS
        const ways = waysOf(settings).length
        if (ways === 0) throw new Refused('Nobody is told yet: set a mailbox or a webhook first.')
        const message = await tellTest(store, id, settings, now())
        alerts.changed(id)
        return { message, deliveries: ways }
      },
    )

    app.get(
      '/sites/:site/alerts/matters',
      {
        config: { access: ['owner', 'viewer'] },
        schema: {
          summary: 'What was noticed: silent loggers, trips, high levels, proven remedies; newest first',
          tags,
          params: SiteParams,
          querystring: MattersQuery,
          response: { 200: pageOf(MatterOut) },
        },
      },
      async (request) => {
        const { id } = await siteOf(store, request.params.site)
        const { open, ...page } = request.query
        const query = { ...page, open: open === undefined ? undefined : open === 'true' }
        const { items, next } = await store.alerts.matters(id, query)
        return { items: items.map(matterOut), next }
      },
    )

    app.get(
      '/sites/:site/alerts/deliveries',
      {
        config: { access: ['owner'] },
        schema: {
          summary: 'Messages, where they go and whether they arrived; newest first',
          tags,
          params: SiteParams,
          querystring: z.object(pageFields),
          response: { 200: pageOf(DeliveryOut) },
        },
      },
      async (request) => {
        const { id } = await siteOf(store, request.params.site)
        const { items, next } = await store.alerts.deliveries(id, request.query)
        return { items: items.map(deliveryOut), next }
      },
    )
  }
}

function matterOut({ id, kind, text, openedAt, closedAt, figures, deliveries }: MatterRecord): MatterOut {
  return {
    id,
    kind,
    text,
    openedAt: writeInstant(openedAt),
    closedAt: closedAt === null ? null : writeInstant(closedAt),
    figures: { ...figures },
    deliveries: deliveries.map(stateOut),
  }
}

function stateOut({ way, state, attempts, triedAt }: DeliveryState): MatterOut['deliveries'][number] {
  return { way, state, attempts, at: triedAt === null ? null : writeInstant(triedAt) }
}

function deliveryOut(delivery: DeliveryRecord): DeliveryOut {
  const { message, kind, target, createdAt, nextAt, error, matters, state } = delivery
  return {
    ...stateOut(delivery),
    message,
    kind,
    target,
    createdAt: writeInstant(createdAt),
    nextAt: state === 'waiting' ? writeInstant(nextAt) : null,
    error,
    matters: [...matters],
  }
}
