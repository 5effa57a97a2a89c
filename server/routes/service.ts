import type { FastifyPluginAsyncZod } from 'fastify-type-provider-zod'
import { z } from 'zod'
import type { Document } from '../plugins/openapi.ts'
import { REFERENCE_CSS } from './reference-css.ts'
import { referenceHtml } from './reference-html.ts'

/** The server about itself: that it is well, and what it can do. */
export const serviceRoutes: FastifyPluginAsyncZod = async (app) => {
  app.get(
    '/health',
    {
      config: { access: 'open' },
      schema: {
        summary: 'Whether the server answers',
        tags: ['service'],
        response: { 200: z.object({ ok: z.literal(true) }) },
      },
    },
    async () => ({ ok: true as const }),
  )

  app.get('/openapi.json', { config: { access: 'open' }, schema: { hide: true } }, async (_request, reply) =>
    reply.header('cache-control', 'no-cache').send(app.swagger()),
  )

  let html: string | undefined
  app.get('/', { config: { access: 'open' }, schema: { hide: true } }, async (_request, reply) => {
    html ??= referenceHtml(app.swagger() as Document)
    return reply.type('text/html; charset=utf-8').header('cache-control', 'no-cache').send(html)
  })

  app.get('/reference.css', { config: { access: 'open' }, schema: { hide: true } }, async (_request, reply) =>
    reply.type('text/css; charset=utf-8').header('cache-control', 'no-cache').send(REFERENCE_CSS),
  )
}
