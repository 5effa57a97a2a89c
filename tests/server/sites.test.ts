import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { SiteOut } from '../../core/contract/index.ts'
import { BAKERY, type Harness, startHarness } from './harness.ts'

describe('site sheets', () => {
  let h: Harness
  beforeAll(async () => {
    h = await startHarness()
  })
  afterAll(() => h.close())

  it('are made, read, changed, listed and removed', async () => {
    const made = await h.call('POST', '/sites', BAKERY)
    expect(made.statusCode).toBe(201)
    const site = SiteOut.parse(made.json())
    expect(made.headers.location).toBe(`/api/sites/${site.id}`)
    expect(site).toMatchObject({
      name: BAKERY.name,
      rcds: [
        { ref: 'A', rampTripMa: 23.5 },
        { ref: 'B', type: 'A' },
      ],
    })

    expect((await h.call('GET', `/sites/${site.id}`)).json()).toEqual(site)

    const patched = await h.call('PATCH', `/sites/${site.id}`, { name: 'Bakery', latitude: null, longitude: null })
    expect(patched.statusCode).toBe(200)
    expect(patched.json()).not.toHaveProperty('latitude')
    expect(patched.json()).toMatchObject({ name: 'Bakery', channels: site.channels })

    const list = await h.call('GET', '/sites?search=bak&limit=10')
    expect(list.json()).toMatchObject({
      items: [{ id: site.id, name: 'Bakery', rcds: 2, channels: 8, lastReadingAt: null }],
      next: null,
    })

    expect((await h.call('DELETE', `/sites/${site.id}`)).statusCode).toBe(204)
    expect((await h.call('GET', `/sites/${site.id}`)).statusCode).toBe(404)
    expect((await h.call('DELETE', `/sites/${site.id}`)).statusCode).toBe(404)
  })

  it('page by key', async () => {
    const ids = new Set<string>()
    for (let i = 0; i < 5; i++) ids.add(await h.makeSite({ ...BAKERY, name: `Paged ${i}` }))
    const seen: string[] = []
    let path: string | undefined = '/sites?search=paged&limit=2'
    while (path !== undefined) {
      const page: { items: { id: string }[]; next: string | null } = (await h.call('GET', path)).json()
      expect(page.items.length).toBeLessThanOrEqual(2)
      seen.push(...page.items.map(({ id }) => id))
      path = page.next === null ? undefined : `/sites?search=paged&limit=2&after=${encodeURIComponent(page.next)}`
    }
    expect(new Set(seen)).toEqual(ids)
    expect(seen).toHaveLength(5)
  })

  it('need only a name and a zone', async () => {
    const made = await h.call('POST', '/sites', { name: 'Bare', timeZone: 'UTC' })
    expect(made.json()).toMatchObject({ rcds: [], channels: [] })
  })

  it.each([
    [
      'a doubled reference',
      {
        rcds: [
          { ref: 'A', ratedMa: 30 },
          { ref: 'A', ratedMa: 30 },
        ],
      },
      '/rcds/1/ref',
    ],
    ['a dangling reference', { channels: [{ ref: 'x', quantity: 'leakage', rcd: 'Z' }] }, '/channels/0/rcd'],
    ['an unknown zone', { timeZone: 'Europe/Nowhere' }, '/timeZone'],
    ['a wrong type', { rcds: [{ ref: 'A', ratedMa: 'thirty' }] }, '/rcds/0/ratedMa'],
    ['a reference with a blank', { rcds: [{ ref: 'A 1', ratedMa: 30 }] }, '/rcds/0/ref'],
  ])('with %s are refused with the place', async (_what, part, path) => {
    const refused = await h.call('POST', '/sites', { name: 'Bad', timeZone: 'UTC', ...part })
    expect(refused.statusCode).toBe(422)
    expect(refused.headers['content-type']).toContain('application/problem+json')
    expect(refused.json().issues[0].path).toBe(path)
    expect(refused.json().detail).toContain('Nothing was stored')
  })

  it('are checked as a whole when a part changes', async () => {
    const site = await h.makeSite()
    const refused = await h.call('PATCH', `/sites/${site}`, { rcds: [] })
    expect(refused.statusCode).toBe(422)
    expect(refused.json().issues[0].path).toMatch(/^\/channels\/0/)
    expect((await h.call('GET', `/sites/${site}`)).json().rcds).toHaveLength(2)
    expect((await h.call('PATCH', `/sites/${site}`, { timeZone: 'Mars/Olympus' })).statusCode).toBe(422)
  })
})
