import { existsSync } from 'node:fs'
import { join } from 'node:path'
import fastifyStatic from '@fastify/static'
import fp from 'fastify-plugin'
import { ProblemError } from './problem-error.ts'

export interface PageOptions {
  /** Folder of the built page. */
  readonly folder: string
}

/** Serves the page: its files as they are, and its one document for every other path outside /api. */
export const pagePlugin = fp<PageOptions>(
  async (app, { folder }) => {
    if (!existsSync(join(folder, 'index.html'))) {
      app.get('/', { config: { access: 'open' }, schema: { hide: true } }, async (_request, reply) =>
        reply
          .type('text/plain; charset=utf-8')
          .send('The page is not built here: run "npm run build", then start again.\n'),
      )
      return
    }
    await app.register(fastifyStatic, { root: folder, serve: false, index: false })
    app.get('/*', { config: { access: 'open' }, schema: { hide: true } }, async (request, reply) => {
      const path = (request.params as { readonly '*': string })['*']
      // What the API does not have is for it to say.
      if (path === 'api' || path.startsWith('api/')) return reply.callNotFound()
      if (isFile(path)) {
        if (!existsSync(join(folder, path))) throw new ProblemError('not-found', 'There is no such file.')
        // The names of built files carry a hash of what is in them.
        return path.startsWith('assets/')
          ? reply.sendFile(path, { maxAge: '365d', immutable: true })
          : reply.sendFile(path, { maxAge: 0 })
      }
      return reply.sendFile('index.html', { maxAge: 0 })
    })
  },
  { name: 'page', dependencies: ['problems'] },
)

/** A last part with an ending is a file; everything else is a place in the page. */
function isFile(path: string): boolean {
  return /\.[A-Za-z0-9]{1,8}$/.test(path) && !path.split('/').includes('..')
}
