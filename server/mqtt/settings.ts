import { z } from 'zod'
import { readTopicRights, type TopicRights } from './rights.ts'

/** How to reach a broker, and what may come from it. */
export interface MqttSettings {
  readonly url: string
  readonly rights: TopicRights
  readonly user: string | undefined
  readonly password: string | undefined
  /** Certificates that are trusted instead of those of the system, PEM. */
  readonly ca: string | undefined
  /** Names the session that the broker keeps while this server is away. */
  readonly clientId: string
}

const Url = z.string().refine((text) => {
  if (!URL.canParse(text)) return false
  const { protocol, hostname, username, password } = new URL(text)
  return ['mqtt:', 'mqtts:'].includes(protocol) && hostname !== '' && username === '' && password === ''
})
const Prefix = z.string().regex(/^[A-Za-z0-9._-]{1,64}(\/[A-Za-z0-9._-]{1,64}){0,4}$/)
const ClientId = z.string().regex(/^[A-Za-z0-9._-]{1,64}$/)

export interface MqttTexts {
  readonly url: string
  readonly sites: string | undefined
  readonly prefix: string | undefined
  readonly user: string | undefined
  readonly password: string | undefined
  readonly ca: string | undefined
  readonly clientId: string | undefined
}

/**
 * Reads what the environment says of a broker.
 * @param usualClientId names the session where none is given: the same at every start on a data folder
 * @returns the settings, or in one sentence what is wrong; never the password
 */
export function readMqttSettings(texts: MqttTexts, usualClientId: string): MqttSettings | { readonly why: string } {
  if (!Url.safeParse(texts.url).success) {
    return { why: 'LEAKTIDE_MQTT_URL is mqtt://HOST:PORT or mqtts://HOST:PORT, without a user in it.' }
  }
  const prefix = Prefix.safeParse(texts.prefix ?? 'leaktide')
  if (!prefix.success) return { why: 'LEAKTIDE_MQTT_PREFIX is one to five plain names joined by "/".' }
  const clientId = ClientId.safeParse(texts.clientId ?? usualClientId)
  if (!clientId.success) return { why: 'LEAKTIDE_MQTT_CLIENT is 1 to 64 characters of A-Z a-z 0-9 . _ -.' }
  if (texts.password !== undefined && texts.user === undefined) {
    return { why: 'A password for MQTT needs LEAKTIDE_MQTT_USER.' }
  }
  const rights = readTopicRights(texts.sites ?? '', prefix.data)
  if ('why' in rights) return { why: `LEAKTIDE_MQTT_SITES: ${rights.why}.` }
  const { url, user, password, ca } = texts
  return { url, rights, user, password, ca, clientId: clientId.data }
}
