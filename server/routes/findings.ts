import type { FastifyPluginAsyncZod } from 'fastify-type-provider-zod'
import { z } from 'zod'
import { Findings } from '../../core/contract/index.ts'
import { MAX_SPAN_MS } from '../analysis/limits.ts'
import { ProblemError } from '../plugins/problem-error.ts'
import { RcdParams } from './params.ts'
import { inOrder, OUT_OF_ORDER, spanFields } from './query.ts'
import { type Rooms, sendRaw, siteOf } from './shared.ts'

const SpanQuery = z
  .object(spanFields)
  .refine(inOrder, OUT_OF_ORDER)
  .refine(({ from, to }) => from === undefined || to === undefined || to - from <= MAX_SPAN_MS, {
    path: ['to'],
    error: 'must be within ten years of "from"',
  })

/** What causes the trips of a device. */
export function findingsRoutes({ store, analysis }: Rooms): FastifyPluginAsyncZod {
  return async (app) => {
    app.get(
      '/sites/:site/rcds/:rcd/findings',
      {
        config: { access: ['owner', 'viewer'], problems: [422] },
        schema: {
          summary: 'The findings of one device over a span',
          description:
            'Without "from" and "to": from the first reading or trip until just after the last reading or record. ' +
            'The same request on the same data gives the same bytes and the same ETag.',
          tags: ['findings'],
          params: RcdParams,
          querystring: SpanQuery,
          response: { 200: Findings, 304: z.undefined() },
        },
      },
      async (request, reply) => {
        const { rcd } = request.params
        const { from = null, to = null } = request.query
        const site = await siteOf(store, request.params.site)
        if (!site.sheet.rcds.some(({ ref }) => ref === rcd)) {
          throw new ProblemError('not-found', 'There is no such device on the sheet of this site.')
        }
        const etag = `W/"${analysis.tag(site, rcd, from, to)}"`
        reply.headers({ etag, 'cache-control': 'private, no-cache' })
        if (request.headers['if-none-match'] === etag) return reply.code(304).send()
        const { body } = await analysis.findings(site, rcd, from, to)
        return sendRaw(reply, 'application/json; charset=utf-8', body)
      },
    )
  }
}
