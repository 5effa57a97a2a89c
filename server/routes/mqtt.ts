import type { FastifyPluginAsyncZod } from 'fastify-type-provider-zod'
import { z } from 'zod'
import { InstantOut, writeInstant } from '../../core/contract/index.ts'
import { SiteParams } from './params.ts'
import { type Rooms, siteOf } from './shared.ts'

const MqttOut = z.object({
  connected: z.boolean().nullable().meta({ description: 'null: this server listens to no broker' }),
  topics: z.array(z.string()).meta({ description: 'what may touch this site' }),
  refused: z
    .array(
      z.object({
        topic: z.string(),
        why: z.string(),
        count: z.int(),
        firstAt: InstantOut,
        lastAt: InstantOut,
        bytes: z.int(),
        sample: z.string().meta({ description: 'how the last one begins' }),
      }),
    )
    .meta({
      description: 'messages that could not be taken, wholly or in part; equal ones counted, the latest hundred',
    }),
})

/** What a broker sends for a site. */
export function mqttRoutes({ store, mqtt }: Rooms): FastifyPluginAsyncZod {
  return async (app) => {
    app.get(
      '/sites/:site/mqtt',
      {
        config: { access: ['owner', 'viewer'] },
        schema: {
          summary: 'The topics of a site, and the messages that could not be taken',
          tags: ['readings'],
          params: SiteParams,
          response: { 200: MqttOut },
        },
      },
      async (request) => {
        const { id } = await siteOf(store, request.params.site)
        const refused = await store.messages.refused(id)
        const status = mqtt()
        return {
          connected: status?.connected() ?? null,
          topics: [...(status?.topicsOf(id) ?? [])],
          refused: refused.map((one) => ({
            ...one,
            firstAt: writeInstant(one.firstAt),
            lastAt: writeInstant(one.lastAt),
          })),
        }
      },
    )
  }
}
