import type { FastifyPluginAsyncZod } from 'fastify-type-provider-zod'
import { z } from 'zod'
import { ProblemError } from '../plugins/problem-error.ts'
import { SiteParams } from './params.ts'
import { callerOf, type Rooms, sendRaw, siteOf } from './shared.ts'

/** The stream that says what arrived at a site. */
export function liveRoutes({ store, live }: Rooms): FastifyPluginAsyncZod {
  return async (app) => {
    app.get(
      '/sites/:site/live',
      {
        config: { access: ['owner', 'viewer'] },
        schema: {
          summary: 'What arrives, as it arrives',
          description:
            'Events: readings {channel, from, to, stored}, records {kind}, sheet {}, matters {} (something was noticed or is over). A comment keeps the line open every quarter minute.',
          tags: ['readings'],
          params: SiteParams,
          response: {
            200: {
              description: 'An endless stream of events',
              content: { 'text/event-stream': { schema: z.string() } },
            },
          },
        },
      },
      async (request, reply) => {
        const { id } = await siteOf(store, request.params.site)
        const stream = live.open(id, callerOf(request))
        if (stream === undefined) throw new ProblemError('busy', 'Too many listen already; come back later.')
        reply.headers({ 'cache-control': 'no-store', 'x-accel-buffering': 'no' })
        return sendRaw(reply, 'text/event-stream', stream)
      },
    )
  }
}
