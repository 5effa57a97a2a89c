/** What a topic may carry; the last part of its name. */
export const MQTT_KINDS = ['readings', 'trips', 'states'] as const
export type MqttKind = (typeof MQTT_KINDS)[number]

/** Where a topic's messages go. */
export interface TopicRight {
  readonly site: string
  readonly kind: MqttKind
  /** The settings name this site; else its topic alone does, by "*". */
  readonly named: boolean
}

/** Which topics are listened to, and which site each may touch. Nothing is allowed that is not named. */
export interface TopicRights {
  /** Filters to subscribe to. */
  readonly filters: readonly string[]
  /** Where messages of a topic go; undefined where it has no right. The site need not exist. */
  rightOf(topic: string): TopicRight | undefined
  /** Topics that a site is reached by. */
  topicsOf(site: string): readonly string[]
}

const NAME = /^[A-Za-z0-9._-]{1,64}$/

/**
 * Reads `NAME=SITE:readings+states, SITE, *`: NAME stands in the topic (SITE itself when left out), the kinds are all
 * three when left out, `*` is every site under its own id.
 * @returns the rights, or in one sentence what is wrong
 */
export function readTopicRights(text: string, prefix: string): TopicRights | { readonly why: string } {
  const exact = new Map<string, TopicRight>()
  let anySite: ReadonlySet<MqttKind> = new Set()
  for (const entry of text.split(',').map((part) => part.trim())) {
    if (entry === '') continue
    const [who = '', what, ...rest] = entry.split(':')
    const kinds = kindsOf(what)
    if (kinds === undefined || rest.length > 0)
      return { why: `after ":" stand ${MQTT_KINDS.join(', ')}, joined by "+"` }
    if (who === '*') {
      anySite = new Set(kinds)
      continue
    }
    const [name = '', site = name, ...more] = who.split('=')
    if (!NAME.test(name) || !NAME.test(site) || more.length > 0) return { why: `"${entry}" is no NAME=SITE` }
    for (const kind of kinds) {
      const topic = `${prefix}/${name}/${kind}`
      if (exact.has(topic)) return { why: `"${name}" stands there twice` }
      exact.set(topic, { site, kind, named: true })
    }
  }
  if (exact.size === 0 && anySite.size === 0) return { why: 'no site is named' }
  return {
    filters: [...exact.keys(), ...[...anySite].map((kind) => `${prefix}/+/${kind}`)],
    rightOf: (topic) => exact.get(topic) ?? rightByOwnId(topic, prefix, anySite),
    topicsOf: (site) => [
      ...[...exact].filter(([, right]) => right.site === site).map(([topic]) => topic),
      ...[...anySite].map((kind) => `${prefix}/${site}/${kind}`).filter((topic) => !exact.has(topic)),
    ],
  }
}

function kindsOf(text: string | undefined): readonly MqttKind[] | undefined {
  if (text === undefined) return MQTT_KINDS
  const kinds = text.split('+').map((kind) => kind.trim())
  return kinds.every((kind): kind is MqttKind => (MQTT_KINDS as readonly string[]).includes(kind)) ? kinds : undefined
}

function rightByOwnId(topic: string, prefix: string, kinds: ReadonlySet<MqttKind>): TopicRight | undefined {
  if (!topic.startsWith(`${prefix}/`)) return undefined
  const [site = '', kind = '', ...more] = topic.slice(prefix.length + 1).split('/')
  if (more.length > 0 || !NAME.test(site) || !kinds.has(kind as MqttKind)) return undefined
  return { site, kind: kind as MqttKind, named: false }
}
