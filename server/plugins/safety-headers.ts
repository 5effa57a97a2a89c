import helmet from '@fastify/helmet'
import fp from 'fastify-plugin'

/**
 * A strict content security policy: everything from this server, nothing inline. The server itself speaks plain http,
 * so nothing here may lift a page to https: on an address of the local network it would load no script at all.
 */
export const safetyHeadersPlugin = fp(
  async (app) => {
    await app.register(helmet, {
      contentSecurityPolicy: {
        useDefaults: false,
        directives: {
          defaultSrc: ["'self'"],
          scriptSrc: ["'self'"],
          styleSrc: ["'self'"],
          imgSrc: ["'self'", 'data:'],
          fontSrc: ["'self'"],
          connectSrc: ["'self'"],
          objectSrc: ["'none'"],
          baseUri: ["'none'"],
          formAction: ["'self'"],
          frameAncestors: ["'none'"],
        },
      },
      hsts: false,
      crossOriginOpenerPolicy: false,
      originAgentCluster: false,
      referrerPolicy: { policy: 'no-referrer' },
    })
    app.addHook('onSend', async (request, reply) => {
      // What carries data stays in no cache, unless a route said otherwise.
      if (request.url.startsWith('/api') && !reply.hasHeader('cache-control')) reply.header('cache-control', 'no-store')
    })
  },
  { name: 'safety-headers' },
)
