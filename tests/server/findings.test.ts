import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { Findings } from '../../core/contract/index.ts'
import { openAnalysis } from '../../server/analysis/analysis.ts'
import { TooBusy } from '../../server/analysis/limits.ts'
import { type Harness, startHarness } from './harness.ts'

const T0 = Date.UTC(2026, 8, 20)
const MINUTE = 60_000

describe('findings', () => {
  let h: Harness
  let site: string
  beforeAll(async () => {
    h = await startHarness()
  })
  beforeEach(async () => {
    site = await h.makeSite()
    const t = Array.from({ length: 1_440 }, (_, i) => T0 + i * MINUTE)
    const blocks = [{ channel: 'tails-a', t, v: t.map((_, i) => 12 + (i % 7) / 10) }]
    await h.call('POST', `/sites/${site}/readings`, { blocks })
    await h.call('POST', `/sites/${site}/trips`, { rcd: 'A', at: T0 + 600 * MINUTE + 30_000 })
  })
  afterAll(() => h.close())

  const ask = (query = '', headers: Record<string, string> = {}) =>
    h.call('GET', `/sites/${site}/rcds/A/findings${query}`, undefined, { headers })

  it('have the shape of the contract, over the span that the data have', async () => {
    const answer = await ask()
    expect(answer.statusCode).toBe(200)
    expect(Findings.parse(answer.json())).toMatchObject({
      rcd: 'A',
      from: '2026-09-20T00:00:00Z',
      to: '2026-09-20T23:59:01Z',
      coverage: { trips: 1 },
    })
  })

  it('are the same bytes for the same data, and carry a tag that says so', async () => {
    const first = await ask()
    h.clock.now += 86_400_000
    const second = await ask()
    expect(second.body).toBe(first.body)
    expect(second.headers.etag).toBe(first.headers.etag)
    const again = await ask('', { 'if-none-match': String(first.headers.etag) })
    expect(again.statusCode).toBe(304)
    expect(again.body).toBe('')
    await h.call('POST', `/sites/${site}/trips`, { rcd: 'A', at: T0 + 900 * MINUTE })
    const changed = await ask('', { 'if-none-match': String(first.headers.etag) })
    expect(changed.statusCode).toBe(200)
    expect(changed.json().coverage.trips).toBe(2)
  })

  it('asked for by many at once are computed once', async () => {
    const answers = await Promise.all(Array.from({ length: 8 }, () => ask(`?from=${T0}&to=${T0 + 720 * MINUTE}`)))
    expect(new Set(answers.map(({ body }) => body)).size).toBe(1)
    expect(answers[0]!.json()).toMatchObject({ from: '2026-09-20T00:00:00Z', to: '2026-09-20T12:00:00Z' })
  })

  it('of a device without anything are an answer too', async () => {
    const bare = await h.makeSite()
    const answer = await h.call('GET', `/sites/${bare}/rcds/B/findings`)
    expect(answer.statusCode).toBe(200)
    expect(Findings.parse(answer.json()).coverage.trips).toBe(0)
  })

  it.each([
    ['?from=2026-09-21T00:00:00Z&to=2026-09-20T00:00:00Z', 400],
    ['?from=2026-09-21', 400],
    ['?from=2001-01-01T00:00:00Z&to=2026-01-01T00:00:00Z', 400],
    ['?from=2001-01-01T00:00:00Z', 422],
  ])('asked for with %s answer %i', async (query, status) => {
    expect((await ask(query)).statusCode).toBe(status)
  })

  it('of a device that is not there are not found', async () => {
    expect((await h.call('GET', `/sites/${site}/rcds/Z/findings`)).statusCode).toBe(404)
  })

  it('that take too long, or find no place in the queue, are told so', async () => {
    const record = (await h.store.site(site))!
    const hasty = openAnalysis({ store: h.store, file: h.dataFile, now: Date.now, timeoutMs: 1 })
    await expect(hasty.findings(record, 'A', T0, T0 + 1)).rejects.toThrow(TooBusy)
    await hasty.close()
    const narrow = openAnalysis({ store: h.store, file: h.dataFile, now: Date.now, queue: 1 })
    const many = await Promise.allSettled(
      [1, 2, 3, 4, 5].map((n) => narrow.findings(record, 'A', T0 + n, T0 + 60 * MINUTE)),
    )
    await narrow.close()
    const refused = many.filter((one) => one.status === 'rejected')
    expect(refused.length).toBeGreaterThan(0)
    for (const one of refused) expect(one.reason).toBeInstanceOf(TooBusy)
    expect(many.some((one) => one.status === 'fulfilled')).toBe(true)
  })
})
