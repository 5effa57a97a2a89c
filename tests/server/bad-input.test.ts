import { gzipSync } from 'node:zlib'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { Problem } from '../../core/contract/index.ts'
import { type Store, StoreError } from '../../server/store/port.ts'
import { type Harness, startHarness } from './harness.ts'

describe('a bad request', () => {
  let h: Harness
  let site: string
  let full = false
  beforeAll(async () => {
    h = await startHarness((store) => withFullDisk(store, () => full))
    site = await h.makeSite()
  })
  afterAll(() => h.close())

  const readings = (body: string | Buffer, headers: Record<string, string> = {}) =>
    h.call('POST', `/sites/${site}/readings`, body, { headers })
  const GOOD = '{"blocks":[{"channel":"tails-a","t":[1790000000000],"v":[1]}]}'

  it.each<[string, number, string | Buffer, Record<string, string>]>([
    ['broken JSON', 400, '{"blocks":', {}],
    ['an empty body', 400, '', {}],
    ['a key that reaches for the prototype', 400, '{"__proto__":{"x":1},"blocks":[]}', {}],
    ['another key that does', 400, '{"constructor":{"prototype":{"x":1}}}', {}],
    ['a wrong media type', 415, GOOD, { 'content-type': 'application/xml' }],
    ['plain text', 415, GOOD, { 'content-type': 'text/plain' }],
    ['a CSV file', 415, 'time,value', { 'content-type': 'text/csv' }],
    ['gzip that is none', 400, GOOD, { 'content-encoding': 'gzip' }],
    ['gzip cut short', 400, gzipSync(GOOD).subarray(0, 30), { 'content-encoding': 'gzip' }],
    ['an encoding that is not taken', 415, GOOD, { 'content-encoding': 'br' }],
    ['a bomb', 413, gzipSync(Buffer.alloc(40 * 1024 * 1024, ' ')), { 'content-encoding': 'gzip' }],
    ['a body too large', 413, Buffer.alloc(33 * 1024 * 1024, ' '), {}],
  ])('with %s answers %i as a problem', async (_what, status, body, headers) => {
    const answer = await readings(body, headers)
    expect(answer.statusCode).toBe(status)
    expect(answer.headers['content-type']).toContain('application/problem+json')
    const problem = Problem.parse(answer.json())
    expect(problem.status).toBe(status)
    expect(problem.detail).toContain('Nothing was stored')
  })

  it('says more than a million readings are too many', async () => {
    const zeros = Array(1_000_001).fill(0).join(',')
    const answer = await readings(`{"blocks":[{"channel":"tails-a","t":[${zeros}],"v":[${zeros}]}]}`)
    expect(answer.statusCode).toBe(413)
  })

  it('has the one shape on every path', async () => {
    const answers = [
      await h.call('GET', '/nothing'),
      await h.call('PUT', '/sites'),
      await h.call('GET', `/sites/${'x'.repeat(200)}`),
      await h.app.inject({ method: 'GET', url: '/api/sites/%zz' }),
      await h.call('POST', '/sites', '[1,2'),
      await h.call('GET', '/sites?limit=many'),
    ]
    expect(answers.map(({ statusCode }) => statusCode)).toEqual([404, 405, 414, 400, 400, 400])
    for (const answer of answers) {
      expect(answer.headers['content-type']).toContain('application/problem+json')
      expect(Problem.parse(answer.json()).status).toBe(answer.statusCode)
    }
    expect(answers[1]!.headers.allow).toContain('POST')
  })

  it('told of a full disk is told to come back, and nothing is half-stored', async () => {
    full = true
    const answer = await readings(GOOD)
    full = false
    expect(answer.statusCode).toBe(503)
    expect(answer.json()).toMatchObject({ type: '/problems/disk-full' })
    expect(answer.json().detail).toContain('Nothing was stored')
    expect(Number(answer.headers['retry-after'])).toBeGreaterThan(0)
    expect((await readings(GOOD)).json()).toMatchObject({ stored: 1 })
  })

  it('names at most twenty places', async () => {
    const trips = Array.from({ length: 500 }, () => ({ rcd: 'Z', at: 'never' }))
    const answer = await h.call('POST', `/sites/${site}/trips`, trips)
    expect(answer.json().issues).toHaveLength(20)
  })
})

describe('every answer', () => {
  let h: Harness
  beforeAll(async () => {
    h = await startHarness()
  })
  afterAll(() => h.close())

  it('carries a strict content security policy that works over plain http', async () => {
    for (const url of ['/', '/api', '/api/health', '/api/nothing']) {
      const policy = String((await h.app.inject(url)).headers['content-security-policy'])
      expect(policy).toContain("default-src 'self'")
      expect(policy).not.toMatch(/unsafe|upgrade-insecure/)
    }
  })

  it('that carries data is kept in no cache', async () => {
    expect((await h.call('GET', '/sites')).headers['cache-control']).toBe('no-store')
  })

  it('at / says in one sentence when the page is not built', async () => {
    const answer = await h.app.inject('/')
    expect(answer.statusCode).toBe(200)
    expect(answer.body).toContain('npm run build')
  })

  it('to an unknown call for health tells nothing else', async () => {
    expect((await h.call('GET', '/health', undefined, { key: null })).json()).toEqual({ ok: true })
  })
})

/** The same store, whose disk is full while `full` says so. */
function withFullDisk(store: Store, full: () => boolean): Store {
  return new Proxy(store, {
    get: (target, name) => {
      const value: unknown = Reflect.get(target, name, target)
      if (typeof value !== 'function') return value
      return (...args: unknown[]) => {
        if (full() && name === 'append') return Promise.reject(new StoreError('disk_full', 'The disk is full.'))
        return value.apply(target, args)
      }
    },
  })
}
