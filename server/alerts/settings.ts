import { z } from 'zod'

/** The relay that takes mail. */
export interface SmtpSettings {
  readonly host: string
  readonly port: number
  /** TLS from the first byte; otherwise STARTTLS where the relay offers it. */
  readonly secure: boolean
  /** Nothing is sent without TLS: always so when there is a password, but on this machine itself. */
  readonly requireTls: boolean
  readonly user: string | undefined
  readonly password: string | undefined
  /** Certificates that are trusted instead of those of the system, PEM. */
  readonly ca: string | undefined
  /** Mailbox that mail comes from. */
  readonly from: string
}

/** What the process allows alerts. */
export interface AlertServerSettings {
  readonly smtp: SmtpSettings | undefined
  /** Hosts that webhooks may call although they are not public. */
  readonly webhookHosts: ReadonlySet<string>
}

export const NO_ALERT_SERVER: AlertServerSettings = { smtp: undefined, webhookHosts: new Set() }

export interface AlertTexts {
  readonly smtpUrl: string | undefined
  readonly smtpUser: string | undefined
  readonly smtpPassword: string | undefined
  readonly smtpCa: string | undefined
  readonly mailFrom: string | undefined
  readonly webhookHosts: string | undefined
}

const From = z
  .string()
  .regex(/^[A-Za-z0-9.!#$%&'*+/=?^_`{|}~-]+@[A-Za-z0-9.-]+$/)
  .max(254)
const LOCAL = new Set(['localhost', '127.0.0.1', '::1'])

/** @returns the settings, or in one sentence what is wrong; never the password */
export function readAlertSettings(texts: AlertTexts): AlertServerSettings | { readonly why: string } {
  const hosts = (texts.webhookHosts ?? '').split(',').map((host) => host.trim().toLowerCase())
  const webhookHosts = new Set(hosts.filter((host) => host !== ''))
  if (![...webhookHosts].every((host) => /^[a-z0-9.:_-]{1,255}$/.test(host))) {
    return { why: 'LEAKTIDE_WEBHOOK_HOSTS is a list of host names and addresses, joined by commas.' }
  }
  if (texts.smtpUrl === undefined) return { smtp: undefined, webhookHosts }
  const url = URL.canParse(texts.smtpUrl) ? new URL(texts.smtpUrl) : undefined
  const secure = url?.protocol === 'smtps:'
  if (!url || !(secure || url.protocol === 'smtp:') || url.hostname === '' || url.username || url.password) {
    return { why: 'LEAKTIDE_SMTP_URL is smtp://HOST:PORT or smtps://HOST:PORT, without a user in it.' }
  }
  const from = From.safeParse(texts.mailFrom)
  if (!from.success) return { why: 'LEAKTIDE_MAIL_FROM is the mailbox that mail comes from, as name@host.' }
  if (texts.smtpPassword !== undefined && texts.smtpUser === undefined) {
    return { why: 'A password for mail needs LEAKTIDE_SMTP_USER.' }
  }
  const host = url.hostname.replace(/^\[|\]$/g, '')
  return {
    webhookHosts,
    smtp: {
      host,
      port: url.port === '' ? (secure ? 465 : 587) : Number(url.port),
      secure,
      requireTls: !secure && texts.smtpUser !== undefined && !LOCAL.has(host),
      user: texts.smtpUser,
      password: texts.smtpPassword,
      ca: texts.smtpCa,
      from: from.data,
    },
  }
}
