import type { FastifyError, FastifyReply, FastifyRequest } from 'fastify'
import fp from 'fastify-plugin'
import type { Problem } from '../../core/contract/index.ts'
import { TooBusy, TooMuch } from '../analysis/limits.ts'
import { Refused } from '../intake/refused.ts'
import { StoreError } from '../store/port.ts'
import { PROBLEMS, ProblemError, type ProblemKind } from './problem-error.ts'
import { allowedMethods } from './route-table.ts'

const MEDIA_TYPE = 'application/problem+json'
const SAFE = new Set(['GET', 'HEAD', 'OPTIONS'])

/** Answers every error, whoever raised it, as one shape. The body is sent as text, so that no response schema touches it. */
export const problemsPlugin = fp(
  async (app) => {
    app.setErrorHandler<FastifyError>((error, request, reply) => answer(problemOf(error, request), request, reply))
    app.setNotFoundHandler((request, reply) => answer(missing(request), request, reply))
  },
  { name: 'problems', dependencies: ['route-table'] },
)

/** Sends a problem. */
export function answer(problem: ProblemError, request: FastifyRequest, reply: FastifyReply): FastifyReply {
  const [status] = PROBLEMS[problem.kind]
  reply.code(status).headers({ 'cache-control': 'no-store', ...problem.more.headers })
  return reply.type(MEDIA_TYPE).send(JSON.stringify(problemDocument(problem, request.method)))
}

/** The document of a problem. A call that would have changed something is told that it did not. */
export function problemDocument(problem: ProblemError, method: string): Problem {
  const [status, title] = PROBLEMS[problem.kind]
  const { issues, extra } = problem.more
  const kept = SAFE.has(method) || problem.kind === 'server-error' ? '' : ` ${NOTHING[method] ?? NOTHING.POST}`
  return {
    type: `/problems/${problem.kind}`,
    title,
    status,
    detail: problem.message + kept,
    ...(issues && issues.length > 0 ? { issues: [...issues] } : {}),
    ...extra,
  }
}

const NOTHING: Readonly<Record<string, string>> = {
  POST: 'Nothing was stored.',
  PATCH: 'Nothing was changed.',
  PUT: 'Nothing was changed.',
  DELETE: 'Nothing was deleted.',
}

function missing(request: FastifyRequest): ProblemError {
  const allow = allowedMethods(request.server, request.url)
  if (allow.length > 0) {
    const detail = `${request.method} is not for this path; use ${allow.join(', ')}.`
    return new ProblemError('method-not-allowed', detail, { headers: { allow: allow.join(', ') } })
  }
  return new ProblemError('not-found', 'There is nothing under this path.')
}

/** What an error of any origin means to the caller. Unknown ones are logged and told without their text. */
export function problemOf(error: FastifyError, request: FastifyRequest): ProblemError {
  if (error instanceof ProblemError) return error
  if (error instanceof Refused) return refusedProblem(error)
  if (error instanceof TooBusy) return new ProblemError('busy', error.message, { headers: { 'retry-after': '10' } })
  if (error instanceof TooMuch) return new ProblemError('refused-body', error.message)
  const raised = error as FastifyError
  if (error instanceof StoreError) return storeProblem(error, request)
  return httpProblem(raised) ?? unforeseen(raised, request)
}

function refusedProblem(error: Refused): ProblemError {
  const { kind, issues, readings, message } = error
  const extra = readings.length > 0 ? { refused: readings } : {}
  const kinds = { unreadable: 'malformed-request', refused: 'refused-body', 'too-large': 'too-large' } as const
  return new ProblemError(kinds[kind], message, { issues, extra })
}

function storeProblem(error: StoreError, request: FastifyRequest): ProblemError {
  switch (error.code) {
    case 'no_such_site':
    case 'no_such_channel':
      return new ProblemError('not-found', error.message)
    case 'disk_full':
      request.log.error(error)
      return new ProblemError('disk-full', 'The disk is full or cannot be written.', {
        headers: { 'retry-after': '60' },
      })
    case 'closed':
      return shuttingDown()
    case 'busy':
      return new ProblemError('busy', 'Another program holds the data file; try again in a moment.', {
        headers: { 'retry-after': '5' },
      })
    case 'newer_schema':
    case 'changed_migration':
    case 'corrupt':
      return unforeseen(error, request)
    default:
      return error.code satisfies never
  }
}

/** The answer while the server stops. */
export function shuttingDown(): ProblemError {
  return new ProblemError('shutting-down', 'The server is shutting down; repeat this in a moment.', {
    headers: { 'retry-after': '5', connection: 'close' },
  })
}

const BY_CODE: Readonly<Record<string, readonly [ProblemKind, string]>> = {
  FST_ERR_CTP_INVALID_MEDIA_TYPE: ['unsupported-media-type', 'This path does not take bodies of this media type.'],
  FST_ERR_CTP_BODY_TOO_LARGE: ['too-large', 'The body, unpacked, is larger than this path takes.'],
  FST_ERR_CTP_EMPTY_JSON_BODY: ['malformed-request', 'The body is empty; JSON was announced.'],
  FST_ERR_CTP_INVALID_JSON_BODY: ['malformed-request', 'The body is not valid JSON.'],
  FST_ERR_CTP_INVALID_CONTENT_LENGTH: ['malformed-request', 'The body is not as long as announced.'],
  FST_CP_ERR_INVALID_CONTENT: ['malformed-request', 'The body cannot be unpacked by the encoding announced.'],
  FST_CP_ERR_INVALID_CONTENT_ENCODING: ['unsupported-media-type', 'Bodies may be packed by gzip or deflate only.'],
  FST_ERR_BAD_URL: ['malformed-request', 'The address is not a valid URL.'],
  FST_ERR_MAX_PARAM_LENGTH: ['address-too-long', 'A part of the address is too long.'],
}

function httpProblem(error: FastifyError): ProblemError | undefined {
  const known = BY_CODE[error.code]
  if (known) return new ProblemError(...known)
  const status = error.statusCode ?? 500
  if (error.name === 'SyntaxError' && status === 400) {
    return new ProblemError('malformed-request', 'The body is not valid JSON, or holds a key that is not allowed.')
  }
  if (status < 400 || status >= 500) return undefined
  const kind = (Object.keys(PROBLEMS) as ProblemKind[]).find((name) => PROBLEMS[name][0] === status)
  return new ProblemError(kind ?? 'malformed-request', 'The request cannot be understood.')
}

function unforeseen(error: Error, request: FastifyRequest): ProblemError {
  request.log.error(error)
  return new ProblemError(
    'server-error',
    'Something went wrong in the server; its log says what. A post can be repeated: what is stored is not stored twice.',
  )
}
