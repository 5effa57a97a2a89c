import type { FastifyInstance } from 'fastify'
import fp from 'fastify-plugin'

/** A route of the API as it was declared. */
interface Declared {
  readonly method: string
  readonly pattern: RegExp
}

declare module 'fastify' {
  interface FastifyInstance {
    /** Every route under /api, for telling a wrong method from a wrong path. */
    readonly routeTable: Declared[]
  }
}

/** Remembers what is declared under /api. */
export const routeTablePlugin = fp(
  async (app) => {
    const table: Declared[] = []
    app.decorate('routeTable', table)
    app.addHook('onRoute', ({ method, url }) => {
      if (!url.startsWith('/api')) return
      const pattern = new RegExp(`^${url.replace(/[.*+?^${}()|[\]\\]/g, '\\$&').replace(/:\w+/g, '[^/]+')}$`)
      for (const one of [method].flat()) table.push({ method: one, pattern })
    })
  },
  { name: 'route-table' },
)

/** The methods that a path takes; none when there is no such path. */
export function allowedMethods(app: FastifyInstance, url: string): string[] {
  const path = url.split('?')[0]!
  return [...new Set(app.routeTable.filter(({ pattern }) => pattern.test(path)).map(({ method }) => method))].sort()
}
