import rateLimit from '@fastify/rate-limit'
import fp from 'fastify-plugin'
import { ProblemError } from './problem-error.ts'

/** Calls a minute: a thousand loggers behind one address each have a key, and so a count, of their own. */
const WITH_KEY = 300_000
const WITHOUT_KEY = 6_000

/** Bounds how often a key, or an address without one, may call. */
export const limitsPlugin = fp(
  async (app) => {
    await app.register(rateLimit, {
      max: (request) => (request.caller === null ? WITHOUT_KEY : WITH_KEY),
      timeWindow: 60_000,
      cache: 20_000,
      keyGenerator: (request) => request.caller?.key.id ?? `address ${request.ip}`,
      addHeadersOnExceeding: {
        'x-ratelimit-limit': false,
        'x-ratelimit-remaining': false,
        'x-ratelimit-reset': false,
      },
      errorResponseBuilder: (_request, { ttl }) =>
        new ProblemError('too-many-requests', 'Too many calls in a minute.', {
          headers: { 'retry-after': String(Math.max(1, Math.ceil(ttl / 1_000))) },
        }),
    })
  },
  { name: 'limits', dependencies: ['keys'] },
)
