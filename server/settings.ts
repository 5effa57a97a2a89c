import { createHash } from 'node:crypto'
import { readFileSync } from 'node:fs'
import { hostname } from 'node:os'
import { join, resolve } from 'node:path'
import { parseArgs } from 'node:util'
import { z } from 'zod'
import { type AlertServerSettings, readAlertSettings } from './alerts/settings.ts'
import { type MqttSettings, readMqttSettings } from './mqtt/settings.ts'

/** What the process was told to do and how; frozen. */
export interface Settings {
  readonly verb: 'serve' | 'demo'
  /** Folder of the data file, absolute. */
  readonly data: string
  readonly host: string
  readonly port: number
  /** The owner key for the first start, when one was given. */
  readonly ownerKey: string | undefined
  /** The broker to listen to; undefined: none. */
  readonly mqtt: MqttSettings | undefined
  readonly alertServer: AlertServerSettings
}

/** Why flags or environment cannot be used, in one sentence. */
export class SettingsError extends Error {
  constructor(message: string) {
    super(message)
    this.name = 'SettingsError'
  }
}

const Port = z
  .string()
  .regex(/^\d{1,5}$/)
  .transform(Number)
  .pipe(z.number().max(65_535))
const Values = z.object({
  data: z.string().min(1).default('./data'),
  host: z
    .string()
    .regex(/^[A-Za-z0-9.:_-]{1,255}$/)
    .default('127.0.0.1'),
  port: Port.default(7250),
  ownerKey: z.string().min(1).max(200).optional(),
})

const USAGE = 'Use: npm start -- --data DIR --port N --host H'
const EXPLAINED = {
  data: '--data (LEAKTIDE_DATA) names a folder.',
  host: '--host (LEAKTIDE_HOST) is a host name or address.',
  port: '--port (LEAKTIDE_PORT) is a number from 0 to 65535.',
  ownerKey: 'LEAKTIDE_OWNER_KEY is 1 to 200 characters long.',
} as const

/**
 * Reads flags and environment; flags win.
 * @throws {SettingsError} in one sentence that can be shown as it is
 */
export function readSettings(argv: readonly string[], env: NodeJS.ProcessEnv = process.env): Settings {
  const { verb, flags } = parse(argv)
  const read = Values.safeParse({
    data: flags.data ?? filled(env.LEAKTIDE_DATA),
    host: flags.host ?? filled(env.LEAKTIDE_HOST),
    port: flags.port ?? filled(env.LEAKTIDE_PORT),
    ownerKey: filled(env.LEAKTIDE_OWNER_KEY),
  })
  if (!read.success) {
    const field = read.error.issues[0]?.path[0] as keyof typeof EXPLAINED
    throw new SettingsError(EXPLAINED[field])
  }
  const data = resolve(read.data.data)
  return Object.freeze({
    verb,
    ...read.data,
    data,
    ownerKey: read.data.ownerKey,
    mqtt: mqttFrom(env, data),
    alertServer: alertServerFrom(env),
  })
}

function mqttFrom(env: NodeJS.ProcessEnv, data: string): MqttSettings | undefined {
  const url = filled(env.LEAKTIDE_MQTT_URL)
  if (url === undefined) return undefined
  const texts = {
    url,
    sites: filled(env.LEAKTIDE_MQTT_SITES),
    prefix: filled(env.LEAKTIDE_MQTT_PREFIX),
    user: filled(env.LEAKTIDE_MQTT_USER),
    password: filled(env.LEAKTIDE_MQTT_PASSWORD) ?? fileText('LEAKTIDE_MQTT_PASSWORD_FILE', env)?.trimEnd(),
    ca: fileText('LEAKTIDE_MQTT_CA_FILE', env),
    clientId: filled(env.LEAKTIDE_MQTT_CLIENT),
  }
  // The same at every start on this folder, so that the broker knows whose messages it kept.
  const place = createHash('sha256').update(`${hostname()} ${data}`).digest('hex').slice(0, 12)
  return orExplain(readMqttSettings(texts, `leaktide-${place}`))
}

function alertServerFrom(env: NodeJS.ProcessEnv): AlertServerSettings {
  return orExplain(
    readAlertSettings({
      smtpUrl: filled(env.LEAKTIDE_SMTP_URL),
      smtpUser: filled(env.LEAKTIDE_SMTP_USER),
      smtpPassword: filled(env.LEAKTIDE_SMTP_PASSWORD) ?? fileText('LEAKTIDE_SMTP_PASSWORD_FILE', env)?.trimEnd(),
      smtpCa: fileText('LEAKTIDE_SMTP_CA_FILE', env),
      mailFrom: filled(env.LEAKTIDE_MAIL_FROM),
      webhookHosts: filled(env.LEAKTIDE_WEBHOOK_HOSTS),
    }),
  )
}

function orExplain<T extends object>(read: T | { readonly why: string }): T {
  if ('why' in read) throw new SettingsError(read.why)
  return read
}

/** What the file holds that a variable names; undefined when it names none. */
function fileText(variable: string, env: NodeJS.ProcessEnv): string | undefined {
  const name = filled(env[variable])
  if (name === undefined) return undefined
  try {
    return readFileSync(name, 'utf8')
  } catch (error) {
    if (!(error instanceof Error)) throw error
    throw new SettingsError(`${variable} names a file that cannot be read.`)
  }
}

/** The data file in a data folder. */
export function dataFile(folder: string): string {
  return join(folder, 'leaktide.db')
}

interface Flags {
  readonly data?: string | undefined
  readonly port?: string | undefined
  readonly host?: string | undefined
}

function parse(argv: readonly string[]): { verb: Settings['verb']; flags: Flags } {
  const options = { data: { type: 'string' }, port: { type: 'string' }, host: { type: 'string' } } as const
  let parsed: { readonly values: Flags; readonly positionals: readonly string[] }
  try {
    parsed = parseArgs({ args: [...argv], options, allowPositionals: true, strict: true })
  } catch (error) {
    if (!(error instanceof TypeError)) throw error
    throw new SettingsError(`${error.message.split('. ')[0]}. ${USAGE}`)
  }
  const [verb = 'serve', ...more] = parsed.positionals
  if ((verb !== 'serve' && verb !== 'demo') || more.length > 0) {
    throw new SettingsError(`There is no command "${parsed.positionals.join(' ')}". ${USAGE}`)
  }
  return { verb, flags: parsed.values }
}

/** An empty variable counts as none. */
function filled(value: string | undefined): string | undefined {
  return value === '' ? undefined : value
}
