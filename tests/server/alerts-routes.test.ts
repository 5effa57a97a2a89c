import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type Receiver, type Rig, SECRET, startReceiver, startRig } from './alerts-rig.ts'

describe('the alert settings of a site', () => {
  let rig: Rig
  let receiver: Receiver
  let site: string
  beforeAll(async () => {
    rig = await startRig()
    receiver = await startReceiver()
    site = await rig.h.makeSite()
  })
  afterAll(async () => {
    await rig.close()
    await receiver.close()
  })
  const put = (body: unknown) => rig.h.call('PUT', `/sites/${site}/alerts`, body)
  const get = () => rig.h.call('GET', `/sites/${site}/alerts`)

  it('begin with nobody told and everything noticed', async () => {
    expect((await get()).json()).toEqual({
      email: null,
      webhook: null,
      about: { silence: true, trip: true, level: true, remedy: true },
      quiet: null,
      silence: { leastSeconds: 30, everySeconds: {} },
      level: { share: 0.8, hysteresis: 0.1 },
      emailReady: false,
    })
  })

  it('are replaced whole; the secret is taken, kept and never shown', async () => {
    const answer = await put({ webhook: { url: receiver.url, secret: SECRET }, quiet: { from: '22:00', to: '06:00' } })
    expect(answer.statusCode).toBe(200)
    expect(answer.json()).toMatchObject({
      webhook: { url: receiver.url, hasSecret: true },
      quiet: { from: '22:00', to: '06:00', tripsBreakThrough: false },
    })
    // What was read may be put again: the secret stays.
    const again = await put((await get()).json())
    expect(again.json()).toEqual(answer.json())
    expect((await rig.h.store.alerts.settings(site))!.secret).toBe(SECRET)
    for (const path of ['/alerts', '/alerts/matters', '/alerts/deliveries', '']) {
      expect((await rig.h.call('GET', `/sites/${site}${path}`)).body).not.toContain(SECRET)
    }
    await put({})
    expect((await get()).json()).toMatchObject({ webhook: null, quiet: null })
    expect((await rig.h.store.alerts.settings(site))!.secret).toBe(null)
  })

  it.each([
    ['a webhook without a secret', { webhook: { url: 'https://hooks.bakery.example/' } }, '/webhook/secret'],
    ['a short secret', { webhook: { url: 'https://hooks.bakery.example/', secret: 'short' } }, '/webhook/secret'],
    ['a private address', { webhook: { url: 'http://192.168.1.1/', secret: SECRET } }, '/webhook/url'],
    ['the metadata address of clouds', { webhook: { url: 'http://169.254.169.254/', secret: SECRET } }, '/webhook/url'],
    ['a loopback address in disguise', { webhook: { url: 'http://[::ffff:7f00:1]/', secret: SECRET } }, '/webhook/url'],
    ['another scheme', { webhook: { url: 'file:///etc/passwd', secret: SECRET } }, '/webhook/url'],
    [
      'a user in the address',
      { webhook: { url: 'https://a:b@hooks.bakery.example/', secret: SECRET } },
      '/webhook/url',
    ],
    ['no mailbox', { email: { to: ['Anna <anna@bakery.example>'] } }, '/email/to/0'],
    ['two mailboxes in one', { email: { to: ['a@b.example, c@d.example'] } }, '/email/to/0'],
    ['a mailbox with a line break', { email: { to: ['a@b.example\r\nBcc: c@d.example'] } }, '/email/to/0'],
    ['eleven mailboxes', { email: { to: Array.from({ length: 11 }, (_, i) => `a${i}@b.example`) } }, '/email/to'],
    ['hours that are none', { quiet: { from: '25:00', to: '06:00' } }, '/quiet/from'],
    ['quiet hours that never begin', { quiet: { from: '06:00', to: '06:00' } }, '/quiet/to'],
    ['a channel that is not there', { silence: { everySeconds: { ghost: 60 } } }, '/silence/everySeconds/ghost'],
    ['a share above one', { level: { share: 1.5 } }, '/level/share'],
    ['a level that is never over', { level: { share: 0.2, hysteresis: 0.2 } }, '/level/hysteresis'],
    ['text', 'x', ''],
  ])('refuse %s', async (_what, body, path) => {
    const answer = await put(body)
    expect(answer.statusCode).toBe(path === '' ? 400 : 422)
    expect(answer.json().detail).toContain('Nothing was changed')
    if (path !== '') expect(answer.json().issues[0].path).toBe(path)
  })

  it('are set by the owner alone; a viewer sees what was noticed, and no addresses', async () => {
    for (const role of ['viewer', 'logger', 'occupant'] as const) {
      const { key } = await rig.h.makeKey(site, role)
      expect((await rig.h.call('PUT', `/sites/${site}/alerts`, {}, { key })).statusCode).toBe(403)
      expect((await rig.h.call('GET', `/sites/${site}/alerts`, undefined, { key })).statusCode).toBe(403)
      expect((await rig.h.call('POST', `/sites/${site}/alerts/test`, {}, { key })).statusCode).toBe(403)
      const seen = await rig.h.call('GET', `/sites/${site}/alerts/matters`, undefined, { key })
      expect(seen.statusCode).toBe(role === 'viewer' ? 200 : 403)
    }
  })

  it('are tried by a test message', async () => {
    expect((await rig.h.call('POST', `/sites/${site}/alerts/test`, {})).statusCode).toBe(422)
    await put({ webhook: { url: receiver.url, secret: SECRET }, quiet: { from: '00:00', to: '23:59' } })
    const answer = await rig.h.call('POST', `/sites/${site}/alerts/test`, {})
    expect(answer.json()).toEqual({ message: expect.any(String), deliveries: 1 })
    await rig.look()
    expect(receiver.calls.map(({ body }) => JSON.parse(body))).toMatchObject([
      { kind: 'test', message: answer.json().message },
    ])
    const { items } = (await rig.h.call('GET', `/sites/${site}/alerts/deliveries`)).json()
    expect(items).toMatchObject([{ state: 'sent', target: receiver.url, way: 'webhook', kind: 'test', attempts: 1 }])
  })

  it('page their lists', async () => {
    for (let i = 0; i < 5; i++) await rig.h.call('POST', `/sites/${site}/alerts/test`, {})
    await rig.look()
    const seen: string[] = []
    for (let after = ''; ; ) {
      const page = (await rig.h.call('GET', `/sites/${site}/alerts/matters?limit=2${after}`)).json()
      seen.push(...page.items.map(({ id }: { id: string }) => id))
      if (page.next === null) break
      after = `&after=${encodeURIComponent(page.next)}`
    }
    expect(new Set(seen).size).toBe(6)
    expect(seen).toHaveLength(6)
  })

  it('show in the list of sites what is open', async () => {
    const { id } = (
      await rig.h.call('POST', '/sites', { name: 'Mill', timeZone: 'Europe/Vienna', rcds: [{ ref: 'A', ratedMa: 30 }] })
    ).json()
    await rig.h.call('PUT', `/sites/${id}/alerts`, {})
    await rig.h.call('POST', `/sites/${id}/trips`, { rcd: 'A', at: rig.h.clock.now })
    await rig.look()
    const { items } = (await rig.h.call('GET', '/sites')).json()
    expect(items.map(({ name, openMatters }: { name: string; openMatters: number }) => [name, openMatters])).toEqual([
      ['Village bakery', 0],
      ['Mill', 1],
    ])
  })

  it('go with their site', async () => {
    await rig.h.call('DELETE', `/sites/${site}`)
    expect((await get()).statusCode).toBe(404)
    await rig.look()
    expect(rig.warnings).toEqual([])
  })
})
