import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { SiteKeyRole } from '../../core/contract/index.ts'
import { type Harness, startHarness } from './harness.ts'
import { type Operation, operationsOf } from './operations.ts'

const ROLES = ['logger', 'viewer', 'occupant'] as const

/** What each role may do beside asking who it is and signing out; everything else is the owner's alone. */
const MAY: Readonly<Record<SiteKeyRole, (operation: Operation) => boolean>> = {
  logger: ({ method, path }) => method === 'POST' && /^\/sites\/\{site\}\/(readings|trips|switchings)$/.test(path),
  viewer: ({ method, path }) =>
    method === 'GET' && path.startsWith('/sites') && !/\/(keys|alerts|alerts\/deliveries)$/.test(path),
  occupant: ({ method, path }) => method === 'POST' && path === '/sites/{site}/trips',
}
const OPEN = ['GET /health', 'POST /session']

describe('rights', () => {
  let h: Harness
  let site: string
  let other: string
  let operations: readonly Operation[]
  const keys = {} as Record<SiteKeyRole, string>
  const foreign = {} as Record<SiteKeyRole, string>
  let ended: string

  beforeAll(async () => {
    h = await startHarness()
    site = await h.makeSite()
    other = await h.makeSite()
    for (const role of ROLES) {
      keys[role] = (await h.makeKey(site, role)).key
      foreign[role] = (await h.makeKey(other, role)).key
    }
    const made = await h.makeKey(site, 'viewer')
    await h.call('DELETE', `/sites/${site}/keys/${made.id}`)
    ended = made.key
    operations = (await operationsOf(h.app)).operations
  })
  afterAll(() => h.close())

  const isOpen = ({ method, path }: Operation): boolean => OPEN.includes(`${method} ${path}`)
  const isSession = ({ path }: Operation): boolean => path === '/session'
  const isLive = ({ path }: Operation): boolean => path.endsWith('/live')
  async function status(operation: Operation, key: string | null, of: string = site): Promise<number> {
    const path = operation.path
      .replace('{site}', of)
      .replace('{id}', 'nothing')
      .replace('{rcd}', 'A')
      .replace('{channel}', 'tails-a')
    // A body that nobody takes: only whether it is looked at at all is asked here.
    const body = ['POST', 'PATCH', 'PUT'].includes(operation.method) ? {} : undefined
    return (await h.call(operation.method, path, body, { key })).statusCode
  }

  it('are declared for every operation', () => {
    expect(operations.length).toBeGreaterThan(40)
    for (const { operation } of operations) expect(operation.security).toBeDefined()
  })

  it('without a key, or with a wrong, ended or mangled one, are none', async () => {
    const wrong = [null, 'nonsense', ended, `${keys.viewer}x`, keys.viewer.slice(1)]
    for (const operation of operations.filter((one) => !isOpen(one))) {
      for (const key of wrong) {
        expect([operation.method, operation.path, key, await status(operation, key)]).toEqual([
          operation.method,
          operation.path,
          key,
          401,
        ])
      }
    }
  })

  it.each(ROLES)('of a %s are its own and no others', async (role) => {
    for (const operation of operations.filter((one) => !isOpen(one) && !isSession(one) && !isLive(one))) {
      const answered = await status(operation, keys[role])
      const what = `${role} ${operation.method} ${operation.path} ${answered}`
      if (MAY[role](operation)) expect(what).not.toMatch(/ (401|403|500)$/)
      else expect(what).toMatch(/ 403$/)
    }
  })

  it.each(ROLES)('of a %s end at its own site, and tell nothing of others', async (role) => {
    for (const operation of operations.filter(({ path }) => path.includes('{site}'))) {
      expect(await status(operation, foreign[role])).toBe(403)
      expect(await status(operation, foreign[role], 'no-such-site')).toBe(403)
    }
  })

  it('of the owner are all', async () => {
    for (const operation of operations.filter((one) => !isLive(one) && !isSession(one))) {
      if (operation.method === 'DELETE' && operation.path === '/sites/{site}') continue
      expect([401, 403, 500]).not.toContain(await status(operation, undefined as unknown as string))
    }
  })

  it('of a viewer show its own site in the list and no other', async () => {
    const { items } = (await h.call('GET', '/sites', undefined, { key: keys.viewer })).json()
    expect(items.map(({ id }: { id: string }) => id)).toEqual([site])
  })

  it('of every role include asking who one is', async () => {
    for (const role of ROLES) {
      const who = await h.call('GET', '/session', undefined, { key: keys[role] })
      expect(who.json()).toEqual({ role, site, label: `${role} key` })
    }
  })

  it('are asked before anything of the body is read', async () => {
    const answer = await h.call('POST', `/sites/${site}/readings`, '{"blocks":', { key: keys.viewer })
    expect(answer.statusCode).toBe(403)
  })

  it('that a route does not declare stop the server from starting', async () => {
    const { default: Fastify } = await import('fastify')
    const { default: cookie } = await import('@fastify/cookie')
    const { keysPlugin } = await import('../../server/plugins/keys.ts')
    const { problemsPlugin } = await import('../../server/plugins/problems.ts')
    const { routeTablePlugin } = await import('../../server/plugins/route-table.ts')
    const app = Fastify()
    await app.register(routeTablePlugin)
    await app.register(problemsPlugin)
    await app.register(cookie)
    await app.register(keysPlugin, { store: h.store, now: Date.now })
    expect(() => app.get('/api/forgotten', async () => 'open to all')).toThrow(/declares no access/)
    await app.close()
  })
})
