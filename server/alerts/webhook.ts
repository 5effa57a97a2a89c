import { createHmac } from 'node:crypto'
import { lookup as resolve } from 'node:dns/promises'
import { request as requestHttp } from 'node:http'
import { request as requestHttps } from 'node:https'
import { isIP, type LookupFunction } from 'node:net'
import { isPublicAddress } from './address.ts'

/** A call of a webhook, ready to be signed and sent. */
export interface WebhookCall {
  readonly url: string
  readonly secret: string
  /** The same on every attempt: a receiver that saw it needs nothing more. */
  readonly message: string
  readonly body: string
  /** Epoch ms. */
  readonly at: number
}

export interface WebhookOptions {
  /** Host names and addresses that may be called although they are not public. */
  readonly allowed: ReadonlySet<string>
  readonly timeoutMs?: number
}

const ANSWER_BYTES = 64 * 1024

/** Signs as receivers check it: HMAC-SHA256 over the time, a dot and the body, in hexadecimal digits. */
export function signature(secret: string, timestamp: string, body: string): string {
  return createHmac('sha256', secret).update(`${timestamp}.${body}`).digest('hex')
}

/** Why an address may not be called, as far as that shows without asking the name service; undefined when it may. */
export function whyNotCallable(url: string, allowed: ReadonlySet<string>): string | undefined {
  if (!URL.canParse(url)) return 'not a URL'
  const { protocol, username, password } = new URL(url)
  if (protocol !== 'http:' && protocol !== 'https:') return 'only http and https are called'
  if (username !== '' || password !== '') return 'a name and password in the address would end up in logs'
  const host = hostOf(url)
  if (isIP(host) === 0 || isPublicAddress(host) || allowed.has(host)) return undefined
  return NOT_PUBLIC
}

const NOT_PUBLIC = 'the address is not public; LEAKTIDE_WEBHOOK_HOSTS can allow its host'

/**
 * Calls a webhook. Resolves when the receiver took it (2xx).
 * Names are resolved for this call and the addresses checked that are then connected to, so that a name cannot change
 * in between. Redirects are not followed, the answer is not read further than a little, and all of it takes 10 s at most.
 * @throws {Error} why it was not delivered, in words that may be shown
 */
export async function callWebhook(call: WebhookCall, { allowed, timeoutMs = 10_000 }: WebhookOptions): Promise<void> {
  const why = whyNotCallable(call.url, allowed)
  if (why !== undefined) throw new Error(why)
  const timestamp = String(Math.floor(call.at / 1_000))
  const status = await post(call, timestamp, allowed.has(hostOf(call.url)), AbortSignal.timeout(timeoutMs))
  if (status >= 200 && status < 300) return
  if (status >= 300 && status < 400) throw new Error(`answered ${status}: redirects are not followed`)
  throw new Error(`answered ${status}`)
}

function post(
  { url, secret, message, body }: WebhookCall,
  timestamp: string,
  trusted: boolean,
  signal: AbortSignal,
): Promise<number> {
  const request = url.toLowerCase().startsWith('https:') ? requestHttps : requestHttp
  return new Promise((done, fail) => {
    const call = request(
      url,
      {
        method: 'POST',
        agent: false,
        signal,
        lookup: trusted ? undefined : publicOnly,
        headers: {
          'content-type': 'application/json',
          'content-length': Buffer.byteLength(body),
          'user-agent': 'Leaktide',
          'leaktide-message': message,
          'leaktide-timestamp': timestamp,
          'leaktide-signature': `v1=${signature(secret, timestamp, body)}`,
        },
      },
      (answer) => {
        let bytes = 0
        answer.on('data', (piece: Buffer) => {
          bytes += piece.length
          if (bytes > ANSWER_BYTES) answer.destroy()
        })
        answer.on('error', () => done(answer.statusCode ?? 0))
        answer.on('close', () => done(answer.statusCode ?? 0))
      },
    )
    call.on('error', (error) => fail(new Error(reasonOf(error))))
    call.end(body)
  })
}

/** Resolves a name, and only to public addresses. */
const publicOnly: LookupFunction = (hostname, options, callback) => {
  resolve(hostname, { all: true, family: options.family === 'IPv4' ? 4 : options.family === 'IPv6' ? 6 : 0 }).then(
    (addresses) => {
      const [first] = addresses
      if (first === undefined || !addresses.every(({ address }) => isPublicAddress(address))) {
        callback(new Error(NOT_PUBLIC), '', 0)
      } else if (options.all) callback(null, addresses)
      else callback(null, first.address, first.family)
    },
    (error: NodeJS.ErrnoException) => callback(error, '', 0),
  )
}

/** What went wrong, without what only a program understands. */
function reasonOf(error: Error): string {
  if (error.name === 'AbortError' || error.name === 'TimeoutError') return 'no answer in time'
  const code = 'code' in error && typeof error.code === 'string' ? error.code : undefined
  const sentences: Readonly<Record<string, string>> = {
    ECONNREFUSED: 'nothing listens there',
    ECONNRESET: 'the connection broke',
    ENOTFOUND: 'there is no such host',
    EAI_AGAIN: 'the name service does not answer',
    ETIMEDOUT: 'no answer in time',
    ABORT_ERR: 'no answer in time',
  }
  return (code && sentences[code]) ?? error.message.slice(0, 200)
}

function hostOf(url: string): string {
  return new URL(url).hostname.replace(/^\[|\]$/g, '').toLowerCase()
}
