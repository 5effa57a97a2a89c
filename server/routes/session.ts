import type { FastifyPluginAsyncZod } from 'fastify-type-provider-zod'
import { z } from 'zod'
import { SignIn, Whoami } from '../../core/contract/index.ts'
import { hashOf, makeSecret } from '../plugins/callers.ts'
import { refuseForeignOrigin, SESSION_COOKIE } from '../plugins/keys.ts'
import type { KeyRecord } from '../store/port.ts'
import { callerOf, type Rooms } from './shared.ts'

const LASTS_MS = 30 * 86_400_000
const ANYBODY = ['owner', 'viewer', 'logger', 'occupant'] as const

/** Signing the page in and out: the key is sent once, then a cookie that no script can read stands for it. */
export function sessionRoutes({ store, live, now }: Rooms): FastifyPluginAsyncZod {
  return async (app) => {
    app.post(
      '/session',
      {
        config: { access: 'open', problems: [401, 403] },
        schema: {
          summary: 'Sign in with a key',
          description:
            'Answers a cookie (HttpOnly, SameSite=Strict) that stands for the key until signing out, or until the key ends.',
          tags: ['session'],
          body: SignIn,
          response: { 200: Whoami },
        },
      },
      async (request, reply) => {
        refuseForeignOrigin(request)
        const key = await app.keyOf(request, request.body.key)
        const token = makeSecret('page')
        const at = now()
        await store.addSession({ hash: hashOf(token), keyId: key.id, createdAt: at, expiresAt: at + LASTS_MS })
        reply.setCookie(SESSION_COOKIE, token, {
          path: '/',
          httpOnly: true,
          sameSite: 'strict',
          secure: request.protocol === 'https',
          maxAge: LASTS_MS / 1_000,
        })
        return whoami(key)
      },
    )

    app.get(
      '/session',
      {
        config: { access: ANYBODY },
        schema: { summary: 'Who is calling', tags: ['session'], response: { 200: Whoami } },
      },
      async (request) => whoami(callerOf(request).key),
    )

    app.delete(
      '/session',
      {
        config: { access: ANYBODY },
        schema: { summary: 'Sign out', tags: ['session'], response: { 204: z.undefined() } },
      },
      async (request, reply) => {
        const { session } = callerOf(request)
        if (session !== null) {
          await store.endSession(session)
          live.endSession(session)
        }
        return reply.clearCookie(SESSION_COOKIE, { path: '/' }).code(204).send()
      },
    )
  }
}

function whoami({ role, site, label }: KeyRecord): Whoami {
  return { role, site, label }
}
