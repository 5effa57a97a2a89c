import type { FastifyRequest } from 'fastify'
import fp from 'fastify-plugin'
import type { KeyRole } from '../../core/contract/index.ts'
import type { KeyRecord, Store } from '../store/port.ts'
import { StoreError } from '../store/port.ts'
import { type Caller, hashOf } from './callers.ts'
import { FailureWindow } from './failure-window.ts'
import { ProblemError } from './problem-error.ts'

/** Who may use a route: everybody, or keys of these roles (on a path with a site: of that site). */
export type Access = 'open' | readonly KeyRole[]

declare module 'fastify' {
  interface FastifyContextConfig {
    access?: Access
  }
  interface FastifyRequest {
    caller: Caller | null
  }
}

export const SESSION_COOKIE = 'leaktide'
const SAFE = new Set(['GET', 'HEAD', 'OPTIONS'])
const TOUCH_MS = 60_000

export interface KeysOptions {
  readonly store: Pick<Store, 'keyByHash' | 'sessionKey' | 'touchKey'>
  readonly now: () => number
}

/**
 * Finds out who calls and whether they may, before anything of the body is read. A route that declares no `access`
 * fails at boot.
 */
export const keysPlugin = fp<KeysOptions>(
  async (app, { store, now }) => {
    const failures = new FailureWindow()
    app.decorateRequest('caller', null)
    app.addHook('onRoute', ({ config, method, url }) => {
      if (config?.access === undefined) throw new Error(`${method} ${url} declares no access`)
    })
    app.addHook('onRequest', async (request) => {
      const access = request.routeOptions.config.access
      if (access === undefined || request.is404) return
      if (access === 'open') return
      request.caller = await identify(request)
      permit(request, request.caller.key, access)
      if (request.caller.via === 'page') refuseForgery(request)
      await touch(request, request.caller.key)
    })

    async function identify(request: FastifyRequest): Promise<Caller> {
      const bearer = bearerOf(request)
      const token = request.cookies[SESSION_COOKIE]
      if (bearer !== undefined) {
        return { key: await keyOf(request, bearer), via: 'bearer', session: null }
      }
      if (token !== undefined) {
        const session = hashOf(token)
        const key = await store.sessionKey(session, now())
        if (key !== undefined) return { key, via: 'page', session }
        throw new ProblemError('key-required', 'You are signed out; sign in with a key.', UNAUTHENTICATED)
      }
      throw new ProblemError('key-required', 'Send a key as "Authorization: Bearer KEY".', UNAUTHENTICATED)
    }

    app.decorate('keyOf', keyOf)
    async function keyOf(request: FastifyRequest, secret: string): Promise<KeyRecord> {
      const key = await store.keyByHash(hashOf(secret))
      if (key !== undefined && key.endedAt === null) return key
      const wait = failures.add(request.ip, now())
      if (wait > 0) {
        throw new ProblemError('too-many-requests', 'Too many wrong keys from this address.', {
          headers: { 'retry-after': String(Math.ceil(wait / 1_000)) },
        })
      }
      throw new ProblemError('unknown-key', 'This key is not known here, or has ended.', UNAUTHENTICATED)
    }

    async function touch(request: FastifyRequest, key: KeyRecord): Promise<void> {
      const at = now()
      if (key.lastUsedAt !== null && Math.abs(at - key.lastUsedAt) < TOUCH_MS) return
      try {
        await store.touchKey(key.id, at)
      } catch (error) {
        // A full disk must not keep a reader out.
        if (!(error instanceof StoreError)) throw error
        request.log.warn(error)
      }
    }
  },
  { name: 'keys', dependencies: ['problems', '@fastify/cookie'] },
)

declare module 'fastify' {
  interface FastifyInstance {
    /** The living key behind a secret. @throws {ProblemError} unknown-key, too-many-requests */
    keyOf(request: FastifyRequest, secret: string): Promise<KeyRecord>
  }
}

const UNAUTHENTICATED = { headers: { 'www-authenticate': 'Bearer realm="leaktide"' } } as const

/** The key of a bearer header; undefined without the header. @throws {ProblemError} for any other scheme */
function bearerOf(request: FastifyRequest): string | undefined {
  const header = request.headers.authorization
  if (header === undefined) return undefined
  const match = /^Bearer +(\S{1,200}) *$/i.exec(header)
  if (match === null) {
    throw new ProblemError('key-required', 'Send the key as "Authorization: Bearer KEY".', UNAUTHENTICATED)
  }
  return match[1]
}

/** A site's key sees its own site and no other; it cannot tell a foreign site from one that does not exist. */
function permit(request: FastifyRequest, key: KeyRecord, access: readonly KeyRole[]): void {
  if (!access.includes(key.role)) {
    throw new ProblemError('not-permitted', `A key of role ${key.role} may not do this.`)
  }
  const site = (request.params as { readonly site?: string }).site
  if (key.role !== 'owner' && site !== undefined && site !== key.site) {
    throw new ProblemError('not-permitted', 'This key is not for that site.')
  }
}

/**
 * A cookie travels by itself, so a call that changes something must also show what another site's page cannot send:
 * a header of our own, and our own origin where the browser tells one.
 */
export function refuseForgery(request: FastifyRequest): void {
  if (SAFE.has(request.method)) return
  if (request.headers['x-leaktide'] !== 'page') {
    throw new ProblemError('forgery-suspected', 'A signed-in page sends the header "x-leaktide: page" with this call.')
  }
  refuseForeignOrigin(request)
}

/** @throws {ProblemError} when the browser names an origin that is not this server's */
export function refuseForeignOrigin(request: FastifyRequest): void {
  const origin = request.headers.origin
  if (origin === undefined) return
  if (!URL.canParse(origin) || new URL(origin).host !== request.headers.host) {
    throw new ProblemError('forgery-suspected', 'This call comes from a page of another origin.')
  }
}
