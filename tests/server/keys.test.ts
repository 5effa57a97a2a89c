import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { ensureOwnerKey } from '../../server/plugins/owner-key.ts'
import { type Harness, NOW_MS, OWNER_KEY, startHarness } from './harness.ts'

const COOKIE = 'leaktide'
const PAGE = { 'x-leaktide': 'page' }

describe('keys', () => {
  let h: Harness
  let site: string
  beforeAll(async () => {
    h = await startHarness()
    site = await h.makeSite()
  })
  afterAll(() => h.close())

  it('are shown once, listed without themselves, and end at once', async () => {
    const made = await h.call('POST', `/sites/${site}/keys`, { role: 'viewer', label: 'office' })
    expect(made.statusCode).toBe(201)
    const { id, key } = made.json()
    expect(key).toMatch(/^lt-viewer-[\w-]{43}$/)
    const list = await h.call('GET', `/sites/${site}/keys`)
    expect(list.body).not.toContain(key)
    expect(list.json().items).toContainEqual({
      id,
      role: 'viewer',
      label: 'office',
      createdAt: '2026-09-22T12:00:00Z',
      lastUsedAt: null,
      endedAt: null,
    })
    expect((await h.call('GET', `/sites/${site}`, undefined, { key })).statusCode).toBe(200)
    expect((await h.call('DELETE', `/sites/${site}/keys/${id}`)).statusCode).toBe(204)
    expect((await h.call('GET', `/sites/${site}`, undefined, { key })).statusCode).toBe(401)
    expect((await h.call('DELETE', `/sites/${site}/keys/${id}`)).statusCode).toBe(404)
  })

  it('tell when they were used, at most once a minute', async () => {
    const { id, key } = await h.makeKey(site, 'viewer')
    const lastUsed = async (): Promise<string> =>
      (await h.call('GET', `/sites/${site}/keys`)).json().items.find((one: { id: string }) => one.id === id).lastUsedAt
    await h.call('GET', `/sites/${site}`, undefined, { key })
    expect(await lastUsed()).toBe('2026-09-22T12:00:00Z')
    h.clock.now = NOW_MS + 59_000
    await h.call('GET', `/sites/${site}`, undefined, { key })
    expect(await lastUsed()).toBe('2026-09-22T12:00:00Z')
    h.clock.now = NOW_MS + 61_000
    await h.call('GET', `/sites/${site}`, undefined, { key })
    expect(await lastUsed()).toBe('2026-09-22T12:01:01Z')
    h.clock.now = NOW_MS
  })

  it.each([{ role: 'owner', label: 'x' }, { role: 'viewer', label: '' }, { role: 'viewer' }, []])(
    'like %j are not made',
    async (body) => {
      expect((await h.call('POST', `/sites/${site}/keys`, body)).statusCode).toBe(422)
    },
  )

  it('of the owner: the first start decides', async () => {
    expect(await ensureOwnerKey(h.store, OWNER_KEY, NOW_MS)).toEqual({ made: undefined, warnings: [] })
    const other = await ensureOwnerKey(h.store, 'another', NOW_MS)
    expect(other.made).toBeUndefined()
    expect(other.warnings).toHaveLength(1)
    expect((await h.call('GET', '/sites', undefined, { key: 'another' })).statusCode).toBe(401)
  })

  it('that are wrong too often make the address wait, not those with a right one', async () => {
    const { key } = await h.makeKey(site, 'viewer')
    const statuses = new Set<number>()
    let last = await h.call('GET', '/sites', undefined, { key: 'guess' })
    for (let i = 0; i < 620; i++) {
      last = await h.call('GET', '/sites', undefined, { key: `guess-${i}` })
      statuses.add(last.statusCode)
    }
    expect([...statuses]).toEqual([401, 429])
    expect(Number(last.headers['retry-after'])).toBeGreaterThan(0)
    expect((await h.call('POST', '/session', { key: 'guess' }, { key: null })).statusCode).toBe(429)
    expect((await h.call('GET', `/sites/${site}`, undefined, { key })).statusCode).toBe(200)
    h.clock.now += 61_000
    expect((await h.call('GET', '/sites', undefined, { key: 'guess' })).statusCode).toBe(401)
    h.clock.now = NOW_MS
  })
})

describe('the page’s session', () => {
  let h: Harness
  let site: string
  beforeAll(async () => {
    h = await startHarness()
    site = await h.makeSite()
  })
  afterAll(() => h.close())

  const signIn = async (key = OWNER_KEY): Promise<string> => {
    const answer = await h.call('POST', '/session', { key }, { key: null })
    expect(answer.statusCode).toBe(200)
    return answer.cookies.find(({ name }) => name === COOKIE)!.value
  }
  const asPage = (
    method: string,
    path: string,
    token: string,
    body?: unknown,
    headers: Record<string, string> = PAGE,
  ) => h.call(method, path, body, { key: null, cookies: { [COOKIE]: token }, headers })

  it('stands for the key in a cookie that no script can read', async () => {
    const answer = await h.call('POST', '/session', { key: OWNER_KEY }, { key: null })
    expect(answer.json()).toEqual({ role: 'owner', site: null, label: 'owner' })
    const cookie = String(answer.headers['set-cookie'])
    expect(cookie).toMatch(/HttpOnly/)
    expect(cookie).toMatch(/SameSite=Strict/)
    expect(cookie).not.toMatch(/Secure/)
    expect(cookie).not.toContain(OWNER_KEY)
    const token = await signIn()
    expect((await asPage('GET', '/session', token)).json()).toMatchObject({ role: 'owner' })
    expect((await asPage('GET', '/sites', token)).statusCode).toBe(200)
  })

  it('needs a key that is known', async () => {
    expect((await h.call('POST', '/session', { key: 'nonsense' }, { key: null })).statusCode).toBe(401)
    expect((await h.call('POST', '/session', {}, { key: null })).statusCode).toBe(422)
    expect((await h.call('GET', '/session', undefined, { key: null })).statusCode).toBe(401)
    expect((await asPage('GET', '/session', 'forged')).statusCode).toBe(401)
  })

  it('ends by signing out, with its key, and by age', async () => {
    const token = await signIn()
    expect((await asPage('DELETE', '/session', token)).statusCode).toBe(204)
    expect((await asPage('GET', '/session', token)).statusCode).toBe(401)

    const { id, key } = await h.makeKey(site, 'viewer')
    const viewing = await signIn(key)
    expect((await asPage('GET', `/sites/${site}`, viewing)).statusCode).toBe(200)
    await h.call('DELETE', `/sites/${site}/keys/${id}`)
    expect((await asPage('GET', `/sites/${site}`, viewing)).statusCode).toBe(401)

    const old = await signIn()
    h.clock.now += 31 * 86_400_000
    expect((await asPage('GET', '/sites', old)).statusCode).toBe(401)
    h.clock.now = NOW_MS
  })

  it('changes something only with a header and an origin that another site cannot send', async () => {
    const token = await signIn()
    const trip = { rcd: 'A', at: '2026-09-21T02:14:05Z' }
    const post = (headers: Record<string, string>) => asPage('POST', `/sites/${site}/trips`, token, trip, headers)
    const forged = await post({})
    expect(forged.statusCode).toBe(403)
    expect(forged.json().type).toBe('/problems/forgery-suspected')
    expect((await post({ 'x-leaktide': 'other' })).statusCode).toBe(403)
    expect((await post({ ...PAGE, origin: 'http://evil.example' })).statusCode).toBe(403)
    expect((await post({ ...PAGE, origin: 'null' })).statusCode).toBe(403)
    expect((await post({ ...PAGE, host: 'bakery.local:7250', origin: 'http://bakery.local:7250' })).statusCode).toBe(
      201,
    )
    expect((await post(PAGE)).statusCode).toBe(200)
    const signIn2 = await h.call(
      'POST',
      '/session',
      { key: OWNER_KEY },
      { key: null, headers: { origin: 'http://evil.example' } },
    )
    expect(signIn2.statusCode).toBe(403)
  })
})
