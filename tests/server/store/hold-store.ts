// A process that opens the store named on its command line, stores one reading and holds on until it is killed.
import { openStore } from '../../../server/store/sqlite/index.ts'
import { ACT, bakery, batch, T0 } from './bakery.ts'

async function work(): Promise<void> {
  const store = await openStore(process.argv[2]!)
  const site = await store.createSite(bakery(), ACT)
  await store.append(site.id, [batch([[T0, 1]])])
  // Nobody refers to the store any more: its lock must hold all the same, so collect what can be collected.
  setTimeout(() => {
    globalThis.gc?.()
    process.stdout.write(`${site.id}\n`)
  }, 20)
}

await work()
setInterval(() => undefined, 1_000)
