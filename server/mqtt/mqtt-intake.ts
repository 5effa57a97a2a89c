import { setTimeout as sleep } from 'node:timers/promises'
import { connect, type IClientOptions, type MqttClient } from 'mqtt'
import { StoreError } from '../store/port.ts'
import { backOff } from './back-off.ts'
import type { MqttSettings } from './settings.ts'
import { type Inlet, takeMessage } from './take-message.ts'

/** What is known of the broker. */
export interface MqttStatus {
  /** Connected and subscribed. */
  readonly connected: () => boolean
  readonly topicsOf: (site: string) => readonly string[]
}

export interface MqttIntake extends MqttStatus {
  /** Lets the message in hand become durable, acknowledges it and leaves; the broker keeps the rest. */
  stop(): Promise<void>
}

export interface MqttOptions {
  readonly settings: MqttSettings
  readonly inlet: Inlet
  readonly warn: (text: string) => void
  /** Waits between attempts, ms. */
  readonly firstWaitMs?: number
  readonly mostWaitMs?: number
}

/**
 * Listens to a broker: QoS 1, one message at a time, each acknowledged only when it is durable (or its refusal is). The
 * session is a lasting one, so that the broker keeps what comes while this server is away. Connects in the background
 * and for ever.
 */
export function openMqtt(options: MqttOptions): MqttIntake {
  const { settings, inlet, warn, firstWaitMs = 1_000, mostWaitMs = 60_000 } = options
  const { rights } = settings
  const stopping = new AbortController()
  let inHand: Promise<void> = Promise.resolve()
  let failures = 0
  let subscribed = false
  let lastWarning = ''
  const warnOnce = (text: string): void => {
    if (text !== lastWarning) warn(text)
    lastWarning = text
  }

  const warnedOf = new Set<string>()
  const warnOfSite = (site: string): void => {
    if (!warnedOf.has(site))
      warn(`MQTT: LEAKTIDE_MQTT_SITES names a site "${site}" that does not exist; its messages are dropped.`)
    warnedOf.add(site)
  }

  const client: MqttClient = connect(settings.url, clientOptions(settings, firstWaitMs))
  client.handleMessage = (packet, done) => {
    const payload = typeof packet.payload === 'string' ? Buffer.from(packet.payload) : packet.payload
    const message = { topic: packet.topic, payload, again: packet.dup === true, retained: packet.retain === true }
    // Never called back when stopping: what was not acknowledged comes again.
    inHand = handle(message).then((durable) => {
      if (durable) done()
    })
  }
  client.on('connect', () => {
    failures = 0
    lastWarning = ''
    client.subscribe([...rights.filters], { qos: 1 }, (error, granted) => {
      const denied = (granted ?? []).filter(({ qos }) => qos === 128).map(({ topic }) => topic)
      subscribed = !error
      if (error && !client.disconnecting) warnOnce(`MQTT: subscribing failed: ${error.message}`)
      else if (denied.length > 0) warnOnce(`MQTT: the broker does not let us listen to ${denied.join(', ')}`)
    })
  })
  client.on('close', () => {
    subscribed = false
    client.options.reconnectPeriod = backOff(failures++, firstWaitMs, mostWaitMs, Math.random)
  })
  client.on('error', (error) => {
    // Several addresses that failed make an error without a text of its own.
    const code = 'code' in error ? String(error.code) : error.name
    warnOnce(`MQTT: ${error.message || code}`)
  })

  async function handle(message: Parameters<typeof takeMessage>[2]): Promise<boolean> {
    const right = rights.rightOf(message.topic)
    // The broker may still remember a subscription from earlier settings.
    if (right === undefined) return true
    for (let attempt = 0; !stopping.signal.aborted; attempt++) {
      try {
        const became = await takeMessage(inlet, right, message)
        if (became === 'nowhere' && right.named) warnOfSite(right.site)
        return true
      } catch (error) {
        if (error instanceof StoreError && error.code === 'no_such_site') return true
        if (error instanceof StoreError && error.code === 'closed') return false
        warnOnce(`MQTT: a message cannot be kept yet: ${error instanceof Error ? error.message : String(error)}`)
        await pause(backOff(attempt, firstWaitMs, mostWaitMs, Math.random))
      }
    }
    return false
  }

  /** Waits, unless it is time to stop. */
  async function pause(ms: number): Promise<void> {
    try {
      await sleep(ms, undefined, { signal: stopping.signal })
    } catch (error) {
      if (!(error instanceof Error && error.name === 'AbortError')) throw error
    }
  }

  return {
    connected: () => client.connected && subscribed,
    topicsOf: (site) => rights.topicsOf(site),
    stop: async () => {
      stopping.abort()
      await inHand
      // By force: messages that came meanwhile stay unacknowledged, and would hold up a farewell for ever.
      await client.endAsync(true)
    },
  }
}

function clientOptions({ user, password, ca, clientId }: MqttSettings, firstWaitMs: number): IClientOptions {
  return {
    clientId,
    clean: false,
    protocolVersion: 4,
    reconnectPeriod: firstWaitMs,
    reconnectOnConnackError: true,
    connectTimeout: 20_000,
    keepalive: 60,
    resubscribe: false,
    rejectUnauthorized: true,
    ...(user === undefined ? {} : { username: user }),
    ...(password === undefined ? {} : { password }),
    ...(ca === undefined ? {} : { ca }),
  }
}
