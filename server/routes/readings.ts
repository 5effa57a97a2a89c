import type { FastifyRequest } from 'fastify'
import type { FastifyPluginAsyncZod } from 'fastify-type-provider-zod'
import { z } from 'zod'
import { InstantIn, ReadingsAnswer, Ref } from '../../core/contract/index.ts'
import { takeColumns } from '../intake/columns.ts'
import { type Place, takeIn } from '../intake/door.ts'
import { takeSenml } from '../intake/senml.ts'
import { readSenmlCbor } from '../intake/senml-cbor.ts'
import { SenmlPack } from '../intake/senml-record.ts'
import { MAX_READINGS_BYTES } from '../plugins/bodies.ts'
import { ProblemError } from '../plugins/problem-error.ts'
import { tellReadings } from '../plugins/tell-readings.ts'
import { SiteParams } from './params.ts'
import { type Rooms, siteOf } from './shared.ts'

/** For the description only: intake reads columns in a loop of its own, reading by reading. */
const Columns = z
  .object({
    blocks: z.array(z.object({ channel: Ref, t: z.array(InstantIn), v: z.array(z.number()) })).max(10_000),
  })
  .meta({ description: 'Columns of equal length for each channel. A bad reading is refused alone.' })

const Cbor = z
  .string()
  .meta({ format: 'binary', description: 'the same SenML records in CBOR, with the integer labels of RFC 8428' })

const REPLACE = z.enum(['true', 'false']).default('false')

/** How loggers post readings. */
export function readingsRoutes({ store, live, alerts, now }: Rooms): FastifyPluginAsyncZod {
  return async (app) => {
    app.post(
      '/sites/:site/readings',
      {
        bodyLimit: MAX_READINGS_BYTES,
        config: {
          access: ['owner', 'logger'],
          describedBody: {
            'application/json': Columns,
            'application/senml+json': SenmlPack,
            'application/sensml+json': SenmlPack,
            'application/senml+cbor': Cbor,
            'application/sensml+cbor': Cbor,
          },
        },
        schema: {
          summary: 'Post readings',
          description:
            'Any order, late, overlapping. What is answered with 200 is durable. Bodies may be packed by gzip, up to 32 MiB unpacked. ' +
            'When not one reading of a body can be taken the answer is 422 with the same list under "refused".',
          tags: ['readings'],
          params: SiteParams,
          querystring: z.object({
            replace: REPLACE.meta({ description: 'true: a new value replaces the stored one' }),
          }),
          response: { 200: ReadingsAnswer },
        },
        onRequest: refuseCsv,
      },
      async (request, reply) => {
        const { id, sheet } = await siteOf(store, request.params.site)
        const senml = /^application\/sens?ml\+(json|cbor)\b/i.test(request.headers['content-type'] ?? '')
        const taken = senml ? takeSenml(packOf(request.body), sheet, now()) : takeColumns(request.body, sheet)
        const answer = await takeIn(store, id, taken, senml ? RECORD_PLACE : COLUMN_PLACE, {
          replace: request.query.replace === 'true',
        })
        if (answer.stored > 0) tellReadings(live, id, taken)
        alerts.arrived(id, taken)
        return reply.type('application/json; charset=utf-8').send(answer)
      },
    )
  }
}

/** CBOR comes as bytes, JSON parsed. */
function packOf(body: unknown): unknown {
  return body instanceof Uint8Array ? readSenmlCbor(body) : body
}

/** The room of the file import, which is still empty. */
async function refuseCsv(request: FastifyRequest): Promise<void> {
  if (/^text\/csv\b/i.test(request.headers['content-type'] ?? '')) {
    throw new ProblemError(
      'unsupported-media-type',
      'CSV files cannot be imported here yet; post application/json columns or application/senml+json.',
    )
  }
}

const COLUMN_PLACE: Place = (block, index, column) => `/blocks/${block}/${column}/${index}`
const RECORD_PLACE: Place = (_block, index, column) => `/${index}/${column}`
