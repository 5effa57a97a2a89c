import type { Receiver, Rig } from './alerts-rig.ts'
import { SECRET, startReceiver, startRig } from './alerts-rig.ts'

export const MINUTE = 60_000
export const HOUR: number = 60 * MINUTE

export interface Told {
  readonly kind: string
  readonly message: string
  readonly text: string
  readonly matters: readonly { readonly id: string; readonly text: string; readonly closedAt: string | null }[]
}
export interface MatterSeen {
  readonly kind: string
  readonly closedAt: string | null
  readonly text: string
  readonly deliveries: readonly { readonly state: string; readonly attempts: number }[]
}
export interface DeliverySeen {
  readonly state: string
  readonly attempts: number
  readonly error: string | null
  readonly nextAt: string | null
}

/** The bakery, watched, with a receiver of its webhooks. */
export interface WatchedSite {
  readonly rig: Rig
  readonly receiver: Receiver
  readonly site: string
  /** Sets alerts by webhook. */
  set(more?: object): Promise<void>
  post(channels?: readonly string[], v?: number, at?: number): Promise<void>
  /** Posts once a minute for so many minutes, looking in between. */
  live(minutes: number, channels?: readonly string[], v?: number): Promise<void>
  trip(body: object): Promise<unknown>
  told(): Told[]
  matters(query?: string): Promise<MatterSeen[]>
  deliveries(): Promise<DeliverySeen[]>
  close(): Promise<void>
}

export async function startWatchedSite(findings = false): Promise<WatchedSite> {
  const rig = await startRig({}, findings)
  const receiver = await startReceiver()
  const site = await rig.h.makeSite()
  const must = async (method: string, path: string, body?: unknown): Promise<unknown> => {
    const answer = await rig.h.call(method, `/sites/${site}${path}`, body)
    if (answer.statusCode >= 300) throw new Error(`${method} ${path} answered ${answer.statusCode}: ${answer.body}`)
    return answer.json()
  }
  const items = async <T>(path: string): Promise<T[]> => ((await must('GET', path)) as { items: T[] }).items
  const post: WatchedSite['post'] = async (channels = ['tails-a'], v = 10, at = rig.h.clock.now) => {
    await must('POST', '/readings', { blocks: channels.map((channel) => ({ channel, t: [at], v: [v] })) })
  }
  return {
    rig,
    receiver,
    site,
    set: async (more = {}) => {
      await must('PUT', '/alerts', { webhook: { url: receiver.url, secret: SECRET }, ...more })
    },
    post,
    live: async (minutes, channels, v) => {
      for (let i = 0; i < minutes; i++) {
        await post(channels, v)
        rig.pass(MINUTE)
        await rig.look()
      }
    },
    trip: (body) => must('POST', '/trips', { rcd: 'A', ...body }),
    told: () => receiver.calls.map(({ body }) => JSON.parse(body)),
    matters: (query = '') => items(`/alerts/matters${query}`),
    deliveries: () => items('/alerts/deliveries'),
    close: async () => {
      await rig.close()
      await receiver.close()
    },
  }
}
