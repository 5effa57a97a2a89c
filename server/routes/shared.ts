import type { Readable } from 'node:stream'
import type { FastifyRequest } from 'fastify'
import type { AlertsDoor } from '../alerts/alerts.ts'
import type { AlertServerSettings } from '../alerts/settings.ts'
import type { Analysis } from '../analysis/analysis.ts'
import type { MqttStatus } from '../mqtt/mqtt-intake.ts'
import type { Caller } from '../plugins/callers.ts'
import type { LiveHub } from '../plugins/live.ts'
import { ProblemError } from '../plugins/problem-error.ts'
import type { Act, SiteRecord, Store, StoreReader } from '../store/port.ts'

/** What routes work with. */
export interface Rooms {
  readonly store: Store
  readonly analysis: Analysis
  readonly live: LiveHub
  readonly alerts: AlertsDoor
  readonly alertServer: AlertServerSettings
  /** Undefined where the server listens to no broker. */
  readonly mqtt: () => MqttStatus | undefined
  readonly now: () => number
}

/** The site of a path. @throws {ProblemError} not-found */
export async function siteOf(store: StoreReader, id: string): Promise<SiteRecord> {
  const site = await store.site(id)
  if (site === undefined) throw noSuchSite()
  return site
}

export function noSuchSite(): ProblemError {
  return new ProblemError('not-found', 'There is no such site.')
}

/** Who calls; on routes that are not open there always is somebody. */
export function callerOf(request: FastifyRequest): Caller {
  if (request.caller === null) throw new Error(`${request.routeOptions.url} asks for a caller but is open`)
  return request.caller
}

/** Sends what is written already, past the schema of the answer. */
export function sendRaw(
  reply: { type(type: string): unknown; send(body: never): unknown },
  type: string,
  body: string | Readable,
): never {
  reply.type(type)
  return reply.send(body as never) as never
}

/** Who does this, and when: what corrections keep. */
export function actOf(request: FastifyRequest, now: () => number): Act {
  const { key } = callerOf(request)
  return { by: key.label, at: now() }
}
