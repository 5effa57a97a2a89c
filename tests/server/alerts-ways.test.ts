import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import fc from 'fast-check'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { isPublicAddress } from '../../server/alerts/address.ts'
import { Arrivals } from '../../server/alerts/arrivals.ts'
import { sendMail } from '../../server/alerts/mail.ts'
import { isQuiet } from '../../server/alerts/quiet.ts'
import { readAlertSettings } from '../../server/alerts/settings.ts'
import { callWebhook, signature, whyNotCallable } from '../../server/alerts/webhook.ts'
import {
  NOW_MS,
  type Receiver,
  type Relay,
  type Rig,
  SECRET,
  startReceiver,
  startRelay,
  startRig,
} from './alerts-rig.ts'

describe('addresses', () => {
  // Examples of the IANA special-purpose address registries (from memory), and addresses of well-known public services.
  it.each([
    '0.0.0.0',
    '10.1.2.3',
    '100.64.0.1',
    '127.0.0.1',
    '127.255.0.9',
    '169.254.169.254',
    '172.16.0.1',
    '172.31.255.255',
    '192.0.0.8',
    '192.168.1.1',
    '198.18.0.1',
    '224.0.0.1',
    '255.255.255.255',
    '::',
    '::1',
    '::ffff:127.0.0.1',
    '::ffff:8.8.8.8',
    '64:ff9b::7f00:1',
    'fc00::1',
    'fd12::1',
    'fe80::1',
    'fe80::1%eth0',
    'ff02::1',
    '2001:db8::1',
    '2002:7f00:1::',
    '2001::1',
    '100::1',
    '',
    'localhost',
    '1.2.3',
    '0x7f.1',
  ])('%s is not public', (address) => {
    expect(isPublicAddress(address)).toBe(false)
  })

  it.each(['1.1.1.1', '8.8.8.8', '172.32.0.1', '100.128.0.1', '193.99.144.80', '2606:4700:4700::1111', '2a00:1450::5'])(
    '%s is public',
    (address) => expect(isPublicAddress(address)).toBe(true),
  )
})

describe('a webhook', () => {
  const call = { secret: SECRET, message: 'm1', body: '{}', at: NOW_MS }
  const allowed = new Set(['127.0.0.1'])
  let receiver: Receiver
  beforeEach(async () => {
    receiver = await startReceiver()
  })
  afterEach(() => receiver.close())

  it.each([
    'http://127.0.0.1:PORT/',
    'http://localhost:PORT/',
    'http://[::1]:PORT/',
    'http://2130706433:PORT/',
    'http://0x7f.1:PORT/',
    'http://127.1:PORT/',
    'http://[::ffff:127.0.0.1]:PORT/',
    'http://0.0.0.0:PORT/',
    'http://localhost.:PORT/',
  ])('at %s is not called unless its host is allowed', async (text) => {
    const url = text.replace('PORT', new URL(receiver.url).port)
    await expect(callWebhook({ ...call, url }, { allowed: new Set() })).rejects.toThrow(
      /not public|no such host|no answer/,
    )
    expect(receiver.calls).toEqual([])
  })

  it('that is allowed by name is called by that name only', async () => {
    const url = `http://localhost:${new URL(receiver.url).port}/`
    await callWebhook({ ...call, url }, { allowed: new Set(['localhost']) })
    expect(receiver.calls).toHaveLength(1)
    await expect(callWebhook({ ...call, url }, { allowed })).rejects.toThrow('not public')
  })

  it('is not followed elsewhere', async () => {
    const other = await startReceiver()
    receiver.answer = (response) => response.writeHead(307, { location: other.url }).end()
    await expect(callWebhook({ ...call, url: receiver.url }, { allowed })).rejects.toThrow('redirects are not followed')
    expect(other.calls).toEqual([])
    await other.close()
  })

  it('that never answers, or never ends its answer, holds nobody up', async () => {
    receiver.answer = () => undefined
    await expect(callWebhook({ ...call, url: receiver.url }, { allowed, timeoutMs: 150 })).rejects.toThrow(
      'no answer in time',
    )
    receiver.answer = (response) => {
      response.writeHead(200)
      const drip = setInterval(() => response.write(Buffer.alloc(16_384)), 5)
      response.on('close', () => clearInterval(drip))
    }
    await callWebhook({ ...call, url: receiver.url }, { allowed, timeoutMs: 5_000 })
  })

  it.each([
    ['nothing listens', 'http://127.0.0.1:9/', 'nothing listens there'],
    ['a host that does not exist', 'http://leaktide.invalid/', /no such host|name service/],
  ])('tells in words when there is %s', async (_what, url, words) => {
    await expect(callWebhook({ ...call, url }, { allowed })).rejects.toThrow(words)
  })

  it('tells in words when the connection breaks', async () => {
    const server = createServer((request) => request.socket.destroy())
    await new Promise<void>((done) => server.listen(0, '127.0.0.1', done))
    const url = `http://127.0.0.1:${(server.address() as AddressInfo).port}/`
    await expect(callWebhook({ ...call, url }, { allowed })).rejects.toThrow('the connection broke')
    server.close()
  })

  it('is signed as openssl signs', () => {
    // printf '%s.%s' 1790000000 '{"kind":"trip"}' | openssl dgst -sha256 -hmac a-secret-of-the-alert-tests (OpenSSL 3.0.19)
    const digest = '8c23339eb9c3d83e0e561f7534df5b77661efc641782b0e796936999df965db5'
    expect(signature(SECRET, '1790000000', '{"kind":"trip"}')).toBe(digest)
  })

  it('has an address of http or https without a user', () => {
    for (const url of ['ftp://h/', 'file:///etc/passwd', 'http://u:p@h/', 'nonsense', '']) {
      expect(whyNotCallable(url, allowed)).toBeDefined()
    }
  })
})

describe('mail', () => {
  let relay: Relay
  afterEach(() => relay.close())
  const mail = { to: 'anna@bakery.example', subject: 'Subject', text: 'Text\n', message: 'm1', at: NOW_MS }

  it('goes to one mailbox, in plain text, with an id that is the same on every attempt', async () => {
    relay = await startRelay()
    await sendMail({ ...mail, subject: 'Bäckerei: ein Schalter', text: 'Größe\n.\n..\nEnde\n' }, relay.smtp)
    await sendMail(mail, relay.smtp)
    const [first, second] = relay.mails
    expect(first).toMatchObject({ from: 'alerts@leaktide.example', to: ['anna@bakery.example'] })
    expect(first!.raw).toMatch(/^Content-Type: text\/plain; charset=utf-8/m)
    expect(first!.raw).toMatch(/^Message-ID: <m1@leaktide\.example>/m)
    expect(first!.raw).toMatch(/^Auto-Submitted: auto-generated/m)
    expect(second!.raw).toMatch(/^Message-ID: <m1@leaktide\.example>/m)
    expect(first!.raw).not.toContain('text/html')
  })

  it('lets no text become a header or another recipient', async () => {
    relay = await startRelay()
    const sly = [
      'a\r\nBcc: eve@evil.example',
      'a\nX-Evil: 1\n\nbody',
      'a\u2028b\u0085c\u0000d',
      `${'x'.repeat(500)}\r\n`,
    ]
    for (const subject of sly)
      await sendMail({ ...mail, subject, text: `${subject}\r\n.\r\nRCPT TO:<eve@evil.example>\r\n` }, relay.smtp)
    expect(relay.mails.map(({ to }) => to)).toEqual(sly.map(() => ['anna@bakery.example']))
    for (const { raw } of relay.mails) {
      const headers = raw.split('\r\n\r\n')[0]!
      expect(headers).not.toMatch(/^(Bcc|X-Evil)/im)
      expect(headers.match(/^Subject:/gim)).toHaveLength(1)
    }
  })

  it('signs in at the relay, and never shows the password when that fails', async () => {
    relay = await startRelay('the-right-password')
    await sendMail(mail, relay.smtp)
    expect(relay.mails[0]!.user).toBe('leaktide')
    const wrong = sendMail(mail, { ...relay.smtp, password: 'the-wrong-password' })
    await expect(wrong).rejects.toThrow(/^mail relay: /)
    await expect(wrong).rejects.not.toThrow(/wrong-password/)
  })

  it('goes over TLS, to a relay whose certificate is trusted and to no other', async () => {
    relay = await startRelay('the-right-password', true)
    await sendMail(mail, relay.smtp)
    expect(relay.mails).toHaveLength(1)
    await expect(sendMail(mail, { ...relay.smtp, ca: undefined })).rejects.toThrow(/certificate/)
    expect(relay.mails).toHaveLength(1)
    while (relay.faults.length === 0) await new Promise((done) => setTimeout(done, 5))
  })

  it('is not sent without TLS where that is required', async () => {
    relay = await startRelay()
    await expect(sendMail(mail, { ...relay.smtp, requireTls: true })).rejects.toThrow(/mail relay/)
    expect(relay.mails).toEqual([])
  })

  it('travels through the outbox: each mailbox once, over a refusal and a restart', async () => {
    relay = await startRelay()
    const rig: Rig = await startRig({ smtp: relay.smtp })
    const site = await rig.h.makeSite()
    const to = ['anna@bakery.example', 'bert@electric.example']
    await rig.h.call('PUT', `/sites/${site}/alerts`, { email: { to } })
    relay.refuse = { code: 451, text: 'greylisted' }
    await rig.h.call('POST', `/sites/${site}/trips`, { rcd: 'A', at: NOW_MS, note: 'ä\n.\nBcc: eve@evil.example' })
    await rig.look()
    expect(relay.mails).toEqual([])
    const { items } = (await rig.h.call('GET', `/sites/${site}/alerts/deliveries`)).json()
    expect(items.map(({ error }: { error: string }) => error)).toEqual([
      expect.stringContaining('greylisted'),
      expect.stringContaining('greylisted'),
    ])
    await rig.restart()
    relay.refuse = undefined
    rig.pass(30_000)
    await rig.look()
    rig.pass(3_600_000)
    await rig.look()
    expect(relay.mails.map((one) => one.to).sort()).toEqual(to.map((one) => [one]))
    expect(relay.mails[0]!.raw).toContain('Subject: Village bakery: an RCD tripped')
    await rig.close()
  })
})

describe('paces', () => {
  const fed = (gaps: readonly number[]): number | null => {
    let elapsed = 0
    const arrivals = new Arrivals(
      () => elapsed,
      () => elapsed,
    )
    const note = (): void =>
      arrivals.note('s', { batches: [{ channel: 'c', t: Float64Array.of(1), v: Float64Array.of(1) }] })
    note()
    for (const gap of gaps) {
      elapsed += gap
      note()
    }
    return arrivals.watched('s')[0]!.everyMs
  }

  it('are those of a steady logger, whatever it is, with jitter and lost posts', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 100, max: 3_600_000 }),
        fc.array(fc.double({ min: 0.9, max: 1.1, noNaN: true }), { minLength: 20, maxLength: 40 }),
        (pace, jitter) => {
          const gaps = jitter.map((factor, i) => pace * factor * (i % 17 === 16 ? 2 : 1))
          const learned = fed(gaps)!
          expect(learned).toBeGreaterThan(0.85 * pace)
          expect(learned).toBeLessThan(2.3 * pace)
        },
      ),
    )
  })

  it('do not learn a silence, but a new rhythm', () => {
    expect(fed([60, 60, 60, 60, 100_000, 60, 60])).toBe(60)
    expect(fed([60, 60, 60, 60, ...Array.from({ length: 20 }, () => 600)])).toBe(600)
    expect(fed(Array.from({ length: 30 }, (_, i) => (i < 15 ? 600 : 60)))).toBeLessThanOrEqual(600)
  })

  it('are none for what has no rhythm, and unknown before the second post', () => {
    expect(fed([])).toBe(null)
    expect(fed([1, 60, 2, 300, 1, 5, 90, 1, 1, 240].map((minutes) => minutes * 60_000))).toBe(null)
  })

  it('are kept when they changed, and taken up again', () => {
    let elapsed = 0
    const arrivals = new Arrivals(
      () => elapsed,
      () => elapsed,
    )
    const batch = { batches: [{ channel: 'c', t: Float64Array.of(1), v: Float64Array.of(1) }] }
    for (let i = 0; i < 5; i++) {
      arrivals.note('s', batch)
      elapsed += 1_000
    }
    expect(arrivals.takeChangedPaces()).toEqual([{ site: 's', channel: 'c', gapMs: 1_000 }])
    expect(arrivals.takeChangedPaces()).toEqual([])
    const later = new Arrivals(
      () => 77,
      () => 5,
    )
    later.load([{ site: 's', channel: 'c', gapMs: 1_000 }])
    expect(later.watched('s')).toEqual([{ channel: 'c', silentMs: 0, everyMs: 1_000, lastAt: null }])
  })
})

describe('quiet hours', () => {
  it("follow the site's clock through summer time and across midnight", () => {
    const quiet = { from: '22:00', to: '06:30', tripsBreakThrough: false }
    const at = (text: string): boolean => isQuiet(quiet, 'Europe/Vienna', Date.parse(text))
    expect([
      at('2026-01-10T20:59:00Z'),
      at('2026-01-10T21:00:00Z'),
      at('2026-01-11T05:29:59Z'),
      at('2026-01-11T05:30:00Z'),
    ]).toEqual([false, true, true, false])
    expect([at('2026-07-10T19:59:00Z'), at('2026-07-10T20:00:00Z'), at('2026-07-11T04:30:00Z')]).toEqual([
      false,
      true,
      false,
    ])
    expect(isQuiet(null, 'Europe/Vienna', NOW_MS)).toBe(false)
  })
})

describe('the settings of the server', () => {
  const NONE = {
    smtpUrl: undefined,
    smtpUser: undefined,
    smtpPassword: undefined,
    smtpCa: undefined,
    mailFrom: undefined,
    webhookHosts: undefined,
  }

  it.each([
    [{ smtpUrl: 'http://relay' }, 'SMTP_URL'],
    [{ smtpUrl: 'smtp://u:p@relay', mailFrom: 'a@b' }, 'without a user'],
    [{ smtpUrl: 'smtp://relay' }, 'MAIL_FROM'],
    [{ smtpUrl: 'smtp://relay', mailFrom: 'A <a@b>' }, 'MAIL_FROM'],
    [{ smtpUrl: 'smtp://relay', mailFrom: 'a@b\r\nBcc: c@d' }, 'MAIL_FROM'],
    [{ smtpUrl: 'smtp://relay', mailFrom: 'a@b', smtpPassword: 'p' }, 'SMTP_USER'],
    [{ webhookHosts: 'a b' }, 'WEBHOOK_HOSTS'],
  ])('%j are refused in one sentence', (texts, sentence) => {
    expect(readAlertSettings({ ...NONE, ...texts })).toEqual({ why: expect.stringContaining(sentence) })
  })

  it('send no password without TLS but on this machine', () => {
    const read = (smtpUrl: string): unknown =>
      readAlertSettings({ ...NONE, smtpUrl, mailFrom: 'a@b.example', smtpUser: 'u', smtpPassword: 'p' })
    expect(read('smtp://relay.example')).toMatchObject({ smtp: { port: 587, secure: false, requireTls: true } })
    expect(read('smtps://relay.example')).toMatchObject({ smtp: { port: 465, secure: true, requireTls: false } })
    expect(read('smtp://localhost:25')).toMatchObject({ smtp: { port: 25, requireTls: false } })
  })
})
