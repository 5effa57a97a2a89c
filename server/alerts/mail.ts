import { createTransport } from 'nodemailer'
import type { SmtpSettings } from './settings.ts'

/** A mail in plain text to one mailbox. */
export interface Mail {
  readonly to: string
  readonly subject: string
  readonly text: string
  /** Becomes the Message-ID, the same on every attempt: mail systems drop a second one. */
  readonly message: string
  /** Epoch ms. */
  readonly at: number
}

const TIMEOUT_MS = 15_000

/**
 * Hands one mail to the relay. Addresses were checked to be plain mailboxes, and no text that somebody wrote reaches a
 * header but the subject, which is one line.
 * @throws {Error} why the relay did not take it, in words that may be shown
 */
export async function sendMail(mail: Mail, smtp: SmtpSettings): Promise<void> {
  const transport = createTransport({
    host: smtp.host,
    port: smtp.port,
    secure: smtp.secure,
    requireTLS: smtp.requireTls,
    connectionTimeout: TIMEOUT_MS,
    greetingTimeout: TIMEOUT_MS,
    socketTimeout: TIMEOUT_MS,
    dnsTimeout: TIMEOUT_MS,
    disableFileAccess: true,
    disableUrlAccess: true,
    ...(smtp.user === undefined ? {} : { auth: { user: smtp.user, pass: smtp.password ?? '' } }),
    ...(smtp.ca === undefined ? {} : { tls: { ca: smtp.ca } }),
  })
  try {
    await transport.sendMail({
      from: { name: 'Leaktide', address: smtp.from },
      to: { name: '', address: mail.to },
      subject: oneLine(mail.subject),
      text: mail.text,
      messageId: `<${mail.message}@${smtp.from.slice(smtp.from.lastIndexOf('@') + 1)}>`,
      date: new Date(mail.at),
      headers: { 'Auto-Submitted': 'auto-generated' },
    })
  } catch (error) {
    throw new Error(reasonOf(error), { cause: error })
  } finally {
    transport.close()
  }
}

function oneLine(text: string): string {
  return text
    .replace(/[\p{Cc}\p{Zl}\p{Zp}]+/gu, ' ')
    .trim()
    .slice(0, 200)
}

/** What the relay said, on one line; never what was sent to it. */
function reasonOf(error: unknown): string {
  if (!(error instanceof Error)) return 'the mail relay did not take it'
  const response = 'response' in error && typeof error.response === 'string' ? error.response : error.message
  return `mail relay: ${oneLine(response)}`
}
