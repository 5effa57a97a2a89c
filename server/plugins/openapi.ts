import swagger from '@fastify/swagger'
import fp from 'fastify-plugin'
import { jsonSchemaTransform } from 'fastify-type-provider-zod'
import type { OpenAPIV3_1 } from 'openapi-types'
import { z } from 'zod'
import { Problem } from '../../core/contract/index.ts'
import { type Access, SESSION_COOKIE } from './keys.ts'

/** Bodies that intake reads by itself: what the description says of them, by media type. */
export type DescribedBody = Readonly<Record<string, z.ZodType>>

declare module 'fastify' {
  interface FastifyContextConfig {
    /** Described, and checked by the handler instead of by the route's schema. */
    describedBody?: DescribedBody
    /** Statuses that this operation may answer besides those that every operation of its kind may. */
    problems?: readonly number[]
  }
}

const TITLES: Readonly<Record<number, string>> = {
  200: 'Done',
  201: 'Stored; something was new',
  204: 'Done; nothing to say',
  304: 'Not changed since',
  400: 'Malformed request',
  401: 'No key, or one that is not known',
  403: 'A key that may not do this',
  404: 'There is no such thing',
  406: 'None of the media types asked for',
  409: 'Conflict',
  413: 'Too large',
  415: 'Media type or encoding that is not taken here',
  422: 'Well-formed but refused; nothing was stored',
  429: 'Too many calls',
  500: 'Something went wrong in the server',
  503: 'Shutting down, disk full or busy',
}

const TAGS = [
  ['sites', 'Site sheets: the board, its circuits, loads and channels'],
  ['readings', 'What loggers post, and what is drawn of it'],
  ['records', 'Trips, switchings, timetables, tests and remedies'],
  ['findings', 'What causes the trips, with odds'],
  ['alerts', 'What is noticed, and who is told'],
  ['keys', 'Who may do what'],
  ['session', 'Signing the page in'],
  ['service', 'The server itself'],
] as const

/** Describes every route in OpenAPI 3.1, from the schemas that validate. */
export const openapiPlugin = fp(
  async (app) => {
    await app.register(swagger, {
      openapi: {
        openapi: '3.1.0',
        info: {
          title: 'Leaktide',
          version: '0.1.0',
          description:
            'Times in: RFC 3339 with offset, or epoch milliseconds. Times out: RFC 3339 UTC in records, epoch milliseconds in columns. ' +
            'Leakage in mA, load current in A, insulation in MΩ, rain in mm per interval, temperature in °C, humidity in %, voltage in V. ' +
            'Every error is a problem document (RFC 9457). Posting the same again changes nothing and says so. ' +
            'A call by the session cookie that changes something also needs the header "x-leaktide: page".',
          license: { name: 'MIT', identifier: 'MIT' },
        },
        servers: [{ url: '/' }],
        tags: TAGS.map(([name, description]) => ({ name, description })),
        components: {
          securitySchemes: {
            bearer: { type: 'http', scheme: 'bearer', description: 'A key: Authorization: Bearer KEY' },
            session: { type: 'apiKey', in: 'cookie', name: SESSION_COOKIE, description: 'A signed-in page' },
          },
        },
      } as object,
      transform: (document) => {
        const described = jsonSchemaTransform(document as Parameters<typeof jsonSchemaTransform>[0])
        const { config, method } = document.route
        if (document.schema?.hide) return described
        return { url: described.url, schema: complete(described.schema as Described, config ?? {}, [method].flat()) }
      },
    })
  },
  { name: 'openapi', dependencies: ['keys'] },
)

interface Described {
  response?: Record<string, Record<string, unknown>>
  body?: unknown
  params?: { properties?: Record<string, Record<string, unknown>> }
  description?: string
  [key: string]: unknown
}

interface Config {
  readonly access?: Access
  readonly describedBody?: DescribedBody
  readonly problems?: readonly number[]
}

/** Adds what follows from a route's declaration: security, error answers, descriptions. */
function complete(schema: Described, config: Config, methods: readonly string[]): Described {
  const open = config.access === 'open' || config.access === undefined
  const roles = open ? [] : (config.access as readonly string[])
  const who = open ? 'Needs no key.' : `For keys of role ${roles.join(', ')}.`
  const withBody = methods.some((method) => ['POST', 'PATCH', 'PUT'].includes(method))
  const statuses = new Set<number>([
    ...(open ? [] : [401, 403]),
    ...(withBody ? [400, 413, 415, 422] : []),
    ...(schema.querystring ? [400] : []),
    ...(schema.params && !open ? [404] : []),
    ...(config.problems ?? []),
    429,
    500,
    503,
  ])
  const response: Record<string, unknown> = {}
  for (const [status, answer] of Object.entries(schema.response ?? {})) {
    response[status] = { description: TITLES[Number(status)], ...answer }
  }
  for (const status of [...statuses].sort((a, b) => a - b)) {
    response[status] = { description: TITLES[status], content: { 'application/problem+json': { schema: PROBLEM } } }
  }
  const content = Object.entries(config.describedBody ?? {}).map(([type, body]) => [type, { schema: jsonSchema(body) }])
  return {
    ...schema,
    description: schema.description ? `${schema.description} ${who}` : who,
    security: open ? [] : [{ bearer: [] }, { session: [] }],
    response: response as NonNullable<Described['response']>,
    ...(content.length > 0 ? { body: { content: Object.fromEntries(content) } } : {}),
  }
}

const PROBLEM = jsonSchema(Problem, 'output')

function jsonSchema(schema: z.ZodType, io: 'input' | 'output' = 'input'): Record<string, unknown> {
  const { $schema: _, ...rest } = z.toJSONSchema(schema, { io, target: 'draft-2020-12', unrepresentable: 'any' })
  return rest
}

/** The document as it is answered. */
export type Document = OpenAPIV3_1.Document
