import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type Harness, startHarness } from './harness.ts'

describe('the page', () => {
  let h: Harness
  const outside = mkdtempSync(join(tmpdir(), 'leaktide-page-'))
  const folder = join(outside, 'web')
  beforeAll(async () => {
    mkdirSync(join(folder, 'assets'), { recursive: true })
    writeFileSync(join(folder, 'index.html'), '<!doctype html><title>Page</title>')
    writeFileSync(join(folder, 'assets', 'main-abc.js'), 'export {}')
    writeFileSync(join(outside, 'secret.txt'), 'secret')
    h = await startHarness(undefined, folder)
  })
  afterAll(async () => {
    await h.close()
    rmSync(outside, { recursive: true, force: true })
  })

  it.each(['/', '/sites/abc', '/sites/abc?rcd=A', '/report'])('is the one document at %s', async (url) => {
    const answer = await h.app.inject(url)
    expect(answer.statusCode).toBe(200)
    expect(answer.headers['content-type']).toContain('text/html')
    expect(answer.body).toContain('<title>Page</title>')
  })

  it('has its files as they are, kept long when their name carries a hash', async () => {
    const script = await h.app.inject('/assets/main-abc.js')
    expect(script.headers['content-type']).toContain('javascript')
    expect(script.headers['cache-control']).toContain('immutable')
    expect((await h.app.inject('/')).headers['cache-control']).toContain('max-age=0')
  })

  it('has no other files', async () => {
    expect((await h.app.inject('/assets/gone.js')).statusCode).toBe(404)
    for (const url of ['/../secret.txt', '/%2e%2e/secret.txt', '/..%2fsecret.txt', '/assets/..%2f..%2fsecret.txt']) {
      expect((await h.app.inject(url)).body).not.toContain('secret')
    }
  })

  it('leaves the API to itself', async () => {
    expect((await h.app.inject('/api/nothing')).json()).toMatchObject({ status: 404 })
    const wrong = await h.app.inject('/api/sites/abc/readings')
    expect(wrong.statusCode).toBe(405)
    expect(wrong.headers.allow).toBe('POST')
    expect((await h.app.inject({ method: 'POST', url: '/sites/abc' })).statusCode).toBe(404)
  })
})
