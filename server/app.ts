import cookie from '@fastify/cookie'
import Fastify, { type FastifyInstance, type FastifyServerOptions } from 'fastify'
import { type AlertsDoor, NO_ALERTS_DOOR } from './alerts/alerts.ts'
import { type AlertServerSettings, NO_ALERT_SERVER } from './alerts/settings.ts'
import type { Analysis } from './analysis/analysis.ts'
import type { MqttStatus } from './mqtt/mqtt-intake.ts'
import { bodiesPlugin, MAX_BODY_BYTES } from './plugins/bodies.ts'
import { checkingPlugin } from './plugins/checking.ts'
import { answerUnparsed } from './plugins/client-errors.ts'
import { closingPlugin } from './plugins/closing.ts'
import { keysPlugin } from './plugins/keys.ts'
import { limitsPlugin } from './plugins/limits.ts'
import { LiveHub } from './plugins/live.ts'
import { openapiPlugin } from './plugins/openapi.ts'
import { pagePlugin } from './plugins/page.ts'
import { answer, problemOf, problemsPlugin } from './plugins/problems.ts'
import { routeTablePlugin } from './plugins/route-table.ts'
import { safetyHeadersPlugin } from './plugins/safety-headers.ts'
import { alertsRoutes } from './routes/alerts.ts'
import { channelsRoutes } from './routes/channels.ts'
import { findingsRoutes } from './routes/findings.ts'
import { keysRoutes } from './routes/keys.ts'
import { liveRoutes } from './routes/live.ts'
import { mqttRoutes } from './routes/mqtt.ts'
import { readingsRoutes } from './routes/readings.ts'
import { recordKindsRoutes } from './routes/record-kinds.ts'
import { serviceRoutes } from './routes/service.ts'
import { sessionRoutes } from './routes/session.ts'
import { sitesRoutes } from './routes/sites.ts'
import type { Store } from './store/port.ts'

export interface AppOptions {
  readonly store: Store
  readonly analysis: Analysis
  /** Epoch milliseconds. */
  readonly now: () => number
  /** Folder of the built page; it may be missing. */
  readonly page: string
  /** Where everything that arrives is told; its own when left out. */
  readonly live?: LiveHub
  /** Who watches the sites; nobody when left out. */
  readonly alerts?: AlertsDoor
  readonly alertServer?: AlertServerSettings
  readonly mqtt?: () => MqttStatus | undefined
  readonly logger?: FastifyServerOptions['logger']
}

/** Composes the whole HTTP side. Listens on nothing: the process does, or a test injects. Closing it leaves the store open. */
export async function createApp(options: AppOptions): Promise<FastifyInstance> {
  const { store, analysis, now, page, logger = false, live = new LiveHub() } = options
  const { alerts = NO_ALERTS_DOOR, alertServer = NO_ALERT_SERVER, mqtt = () => undefined } = options
  const app = Fastify({
    logger,
    bodyLimit: MAX_BODY_BYTES,
    requestTimeout: 60_000,
    connectionTimeout: 120_000,
    keepAliveTimeout: 72_000,
    http: { headersTimeout: 20_000, maxHeaderSize: 16_384 },
    forceCloseConnections: 'idle',
    return503OnClosing: false,
    routerOptions: { maxParamLength: 100 },
    frameworkErrors: (error, request, reply) => {
      answer(problemOf(error, request), request, reply)
    },
    clientErrorHandler: answerUnparsed,
  })
  await app.register(routeTablePlugin)
  await app.register(problemsPlugin)
  await app.register(closingPlugin, { live })
  await app.register(safetyHeadersPlugin)
  await app.register(cookie)
  await app.register(keysPlugin, { store, now })
  await app.register(limitsPlugin)
  await app.register(bodiesPlugin)
  await app.register(checkingPlugin)
  await app.register(openapiPlugin)

  const rooms = { store, analysis, live, alerts, alertServer, mqtt, now }
  await app.register(
    async (api) => {
      await api.register(sitesRoutes(rooms))
      await api.register(readingsRoutes(rooms))
      await api.register(channelsRoutes(rooms))
      await api.register(liveRoutes(rooms))
      await api.register(recordKindsRoutes(rooms))
      await api.register(findingsRoutes(rooms))
      await api.register(alertsRoutes(rooms))
      await api.register(mqttRoutes(rooms))
      await api.register(keysRoutes(rooms))
      await api.register(sessionRoutes(rooms))
      await api.register(serviceRoutes)
    },
    { prefix: '/api' },
  )
  await app.register(pagePlugin, { folder: page })
  return app
}
