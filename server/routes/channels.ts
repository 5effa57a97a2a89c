import { Readable } from 'node:stream'
import type { FastifyPluginAsyncZod } from 'fastify-type-provider-zod'
import { z } from 'zod'
import { Channel, EARLIEST_MS, InstantOut, LATEST_MS, pageOf, Trace, writeInstant } from '../../core/contract/index.ts'
import type { Series } from '../../core/timeline/series.ts'
import { ProblemError } from '../plugins/problem-error.ts'
import type { ChannelExtent } from '../store/port.ts'
import { preferred } from './accept.ts'
import { ChannelParams, SiteParams } from './params.ts'
import { countQuery, inOrder, OUT_OF_ORDER, spanFields } from './query.ts'
import { type Rooms, sendRaw, siteOf } from './shared.ts'

const ChannelOut = Channel.extend({
  count: z.int().meta({ description: 'readings stored' }),
  first: InstantOut.nullable(),
  last: InstantOut.nullable(),
})
const READS = ['owner', 'viewer'] as const
const CSV = 'text/csv'
const NDJSON = 'application/x-ndjson'

/** What is stored of a site's channels: extents, traces, everything. */
export function channelsRoutes({ store }: Rooms): FastifyPluginAsyncZod {
  return async (app) => {
    app.get(
      '/sites/:site/channels',
      {
        config: { access: READS },
        schema: {
          summary: 'The channels of a site and how far their readings reach',
          tags: ['readings'],
          params: SiteParams,
          response: { 200: pageOf(ChannelOut) },
        },
      },
      async (request) => {
        const { id, sheet } = await siteOf(store, request.params.site)
        const extents = new Map((await store.extents(id)).map((extent) => [extent.channel, extent]))
        return { items: sheet.channels.map((channel) => channelOut(channel, extents.get(channel.ref))), next: null }
      },
    )

    app.get(
      '/sites/:site/channels/:channel/trace',
      {
        config: { access: READS },
        schema: {
          summary: 'A channel as it is drawn',
          description:
            'Per pixel column the first, least, greatest and last reading, so that the drawn line is the same as from all readings. ' +
            'Gaps longer than three usual intervals hold a null. Without "from" and "to": all of it.',
          tags: ['readings'],
          params: ChannelParams,
          querystring: z
            .object({ ...spanFields, columns: countQuery(10, 20_000, 1_500) })
            .refine(inOrder, OUT_OF_ORDER),
          response: { 200: Trace },
        },
      },
      async (request, reply) => {
        const { site, channel, extent } = await channelOf(request.params)
        const from = request.query.from ?? extent?.first ?? EARLIEST_MS
        const to = request.query.to ?? (extent === undefined ? LATEST_MS : extent.last + 1)
        const trace =
          from < to
            ? await store.trace(site, channel, from, to, request.query.columns)
            : { t: [], v: [], exact: true, stored: 0 }
        // Written here: NaN becomes null, and thousands of points skip a schema that could only say yes.
        const body = { t: Array.from(trace.t), v: Array.from(trace.v), exact: trace.exact, stored: trace.stored }
        return sendRaw(reply, 'application/json; charset=utf-8', JSON.stringify(body))
      },
    )

    app.get(
      '/sites/:site/channels/:channel/readings',
      {
        config: { access: READS, problems: [406] },
        schema: {
          summary: 'All readings of a channel, as CSV or NDJSON',
          description:
            'By Accept: text/csv with the columns time (RFC 3339, UTC) and value, or application/x-ndjson with {"t": epoch ms, "v": value} a line.',
          tags: ['readings'],
          params: ChannelParams,
          querystring: z.object(spanFields).refine(inOrder, OUT_OF_ORDER),
          response: {
            200: {
              description: 'Readings in order of time',
              content: {
                [CSV]: { schema: z.string().meta({ examples: ['time,value\n2026-09-21T02:14:05Z,12.9\n'] }) },
                [NDJSON]: { schema: z.string().meta({ examples: ['{"t":1790000000000,"v":12.9}\n'] }) },
              },
            },
          },
        },
      },
      async (request, reply) => {
        const type = preferred(request.headers.accept, [CSV, NDJSON, 'application/ndjson', 'application/jsonl'])
        if (type === undefined) {
          throw new ProblemError('not-acceptable', `Readings come as ${CSV} or ${NDJSON}.`)
        }
        const { site, channel } = await channelOf(request.params)
        const { from = EARLIEST_MS, to = LATEST_MS } = request.query
        const pieces = store.readingPieces(site, channel, from, to)
        const lines = type === CSV ? csv(pieces) : ndjson(pieces)
        const stream = Readable.from(lines, { objectMode: false, highWaterMark: 65_536 })
        return sendRaw(reply, type === CSV ? `${CSV}; charset=utf-8; header=present` : type, stream)
      },
    )
  }

  async function channelOf(params: { readonly site: string; readonly channel: string }): Promise<{
    readonly site: string
    readonly channel: string
    readonly extent: ChannelExtent | undefined
  }> {
    const { id, sheet } = await siteOf(store, params.site)
    const extent = (await store.extents(id)).find(({ channel }) => channel === params.channel)
    if (extent === undefined && !sheet.channels.some(({ ref }) => ref === params.channel)) {
      throw new ProblemError('not-found', 'There is no such channel on the sheet of this site.')
    }
    return { site: id, channel: params.channel, extent }
  }
}

function channelOut(channel: Channel, extent: ChannelExtent | undefined): z.infer<typeof ChannelOut> {
  return {
    ...channel,
    count: extent?.count ?? 0,
    first: extent === undefined ? null : writeInstant(extent.first),
    last: extent === undefined ? null : writeInstant(extent.last),
  }
}

async function* csv(pieces: AsyncIterable<Series>): AsyncGenerator<string> {
  yield 'time,value\n'
  for await (const { t, v } of pieces) {
    let text = ''
    for (let i = 0; i < t.length; i++) text += `${writeInstant(t[i]!)},${digits(v[i]!)}\n`
    yield text
  }
}

async function* ndjson(pieces: AsyncIterable<Series>): AsyncGenerator<string> {
  for await (const { t, v } of pieces) {
    let text = ''
    for (let i = 0; i < t.length; i++) text += `{"t":${t[i]},"v":${digits(v[i]!)}}\n`
    yield text
  }
}

/** The shortest digits that read back as the same number, minus zero too. */
function digits(value: number): string {
  return Object.is(value, -0) ? '-0' : String(value)
}
