import fp from 'fastify-plugin'
import type { LiveHub } from './live.ts'
import { shuttingDown } from './problems.ts'

/** While the app closes: what is in flight is finished, streams end, new calls are told to come back. */
export const closingPlugin = fp<{ readonly live: LiveHub }>(
  async (app, { live }) => {
    let closing = false
    app.addHook('preClose', async () => {
      closing = true
      live.close()
    })
    app.addHook('onRequest', async () => {
      if (closing) throw shuttingDown()
    })
  },
  { name: 'closing', dependencies: ['problems'] },
)
