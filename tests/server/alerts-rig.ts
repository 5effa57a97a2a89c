import { once } from 'node:events'
import { createServer, type IncomingMessage, type Server, type ServerResponse } from 'node:http'
import type { AddressInfo } from 'node:net'
import { SMTPServer } from 'smtp-server'
import { type Alerts, type AlertsDoor, openAlerts } from '../../server/alerts/alerts.ts'
import type { AlertServerSettings, SmtpSettings } from '../../server/alerts/settings.ts'
import { TooBusy } from '../../server/analysis/limits.ts'
import { LiveHub } from '../../server/plugins/live.ts'
import { type Harness, NOW_MS, startHarness } from './harness.ts'
import { TLS_CERT, TLS_KEY } from './tls-for-tests.ts'

export const SECRET = 'a-secret-of-the-alert-tests'

/** The app with somebody who watches, on a clock that tests move. */
export interface Rig {
  readonly h: Harness
  readonly alerts: () => Alerts
  /** Things that went wrong unseen. */
  readonly warnings: unknown[]
  /** Lets time pass, and what is watched by a clock that only runs forward too. */
  pass(ms: number): void
  /** Sets the machine's clock; no time passes. */
  setClock(ms: number): void
  /** Looks, and waits until all is asked and delivered. */
  look(): Promise<void>
  /** Ends the watch and begins it anew, as a restart of the server does. */
  restart(): Promise<void>
  close(): Promise<void>
}

/** @param findings whether findings are really asked for: they take a second */
export async function startRig(server: Partial<AlertServerSettings> = {}, findings = false): Promise<Rig> {
  const alertServer = { smtp: undefined, webhookHosts: new Set(['127.0.0.1']), ...server }
  let alerts: Alerts
  const door: AlertsDoor = {
    arrived: (site, taken) => alerts.arrived(site, taken),
    changed: (site) => alerts.changed(site),
  }
  const live = new LiveHub()
  live.watch((site, event) => {
    if (event.kind === 'records' || event.kind === 'sheet') alerts.changed(site)
  })
  const h = await startHarness((store) => store, undefined, { live, alerts: door, alertServer })
  let elapsed = 1_000_000
  const warnings: unknown[] = []
  const open = (): Promise<Alerts> =>
    openAlerts({
      store: h.store,
      findings: (site, rcd) =>
        findings ? h.analysis.findings(site, rcd, null, null) : Promise.reject(new TooBusy('Not in this test.')),
      now: () => h.clock.now,
      elapsed: () => elapsed,
      server: alertServer,
      warn: (error) => warnings.push(error),
      onChange: (site) => live.tell(site, { kind: 'matters' }),
    })
  alerts = await open()
  return {
    h,
    alerts: () => alerts,
    warnings,
    pass: (ms) => {
      h.clock.now += ms
      elapsed += ms
    },
    setClock: (ms) => {
      h.clock.now = ms
    },
    look: async () => {
      await alerts.look()
      await alerts.settled()
      await alerts.settled()
    },
    restart: async () => {
      await alerts.close()
      elapsed = 5_000
      alerts = await open()
    },
    close: async () => {
      await alerts.close()
      await h.close()
    },
  }
}

export interface Received {
  readonly headers: IncomingMessage['headers']
  readonly body: string
}

/** A real receiver of webhooks that answers as it is told. */
export interface Receiver {
  readonly url: string
  readonly calls: Received[]
  /** Answers from now on; usually 204. */
  answer: (response: ServerResponse, call: number) => void
  close(): Promise<void>
}

export async function startReceiver(): Promise<Receiver> {
  const calls: Received[] = []
  const receiver: Pick<Receiver, 'answer'> = { answer: (response) => response.writeHead(204).end() }
  const server: Server = createServer((request, response) => {
    const pieces: Buffer[] = []
    request.on('data', (piece: Buffer) => pieces.push(piece))
    request.on('end', () => {
      calls.push({ headers: request.headers, body: Buffer.concat(pieces).toString() })
      receiver.answer(response, calls.length)
    })
  })
  server.listen(0, '127.0.0.1')
  await once(server, 'listening')
  const url = `http://127.0.0.1:${(server.address() as AddressInfo).port}/hook?of=bakery`
  return Object.assign(receiver, {
    url,
    calls,
    close: async () => {
      server.closeAllConnections()
      const closed = once(server, 'close')
      server.close()
      await closed
    },
  })
}

export interface Mailed {
  readonly from: string
  readonly to: readonly string[]
  readonly raw: string
  readonly user: string | undefined
}

/** A real mail relay. */
export interface Relay {
  readonly smtp: SmtpSettings
  readonly mails: Mailed[]
  /** Connections that broke. */
  readonly faults: readonly Error[]
  /** When set, mail is refused with this. */
  refuse: { readonly code: number; readonly text: string } | undefined
  close(): Promise<void>
}

/** @param tls TLS from the first byte, with the certificate of the tests */
export async function startRelay(password?: string, tls = false): Promise<Relay> {
  const mails: Mailed[] = []
  const relay: Pick<Relay, 'refuse'> = { refuse: undefined }
  const server = new SMTPServer({
    logger: false,
    ...(tls ? { secure: true, key: TLS_KEY, cert: TLS_CERT } : {}),
    authOptional: password === undefined,
    allowInsecureAuth: true,
    disabledCommands: password === undefined ? ['STARTTLS', 'AUTH'] : ['STARTTLS'],
    onAuth: (auth, _session, done) =>
      auth.password === password ? done(null, { user: auth.username }) : done(new Error('no such user')),
    onData: (stream, session, done) => {
      const pieces: Buffer[] = []
      stream.on('data', (piece: Buffer) => pieces.push(piece))
      stream.on('end', () => {
        if (relay.refuse) {
          done(Object.assign(new Error(relay.refuse.text), { responseCode: relay.refuse.code }))
          return
        }
        const { mailFrom, rcptTo } = session.envelope
        mails.push({
          from: mailFrom === false ? '' : mailFrom.address,
          to: rcptTo.map(({ address }) => address),
          raw: Buffer.concat(pieces).toString(),
          user: typeof session.user === 'string' ? session.user : undefined,
        })
        done()
      })
    },
  })
  const faults: Error[] = []
  server.on('error', (error) => faults.push(error))
  const listening = server.listen(0, '127.0.0.1')
  await once(listening, 'listening')
  const { port } = listening.address() as AddressInfo
  return Object.assign(relay, {
    mails,
    faults,
    smtp: {
      host: tls ? 'localhost' : '127.0.0.1',
      port,
      secure: tls,
      requireTls: false,
      user: password === undefined ? undefined : 'leaktide',
      password,
      ca: tls ? TLS_CERT : undefined,
      from: 'alerts@leaktide.example',
    },
    close: () => new Promise<void>((done) => server.close(done)),
  })
}

export { NOW_MS }
