// A process that opens the store named on its command line, stores one reading and holds on until it is killed.
import { openStore } from '../../../server/store/sqlite/index.ts'
import { ACT, bakery, batch, T0 } from './port-suite.ts'

const store = await openStore(process.argv[2]!)
const site = await store.createSite(bakery(), ACT)
await store.append(site.id, [batch([[T0, 1]])])
process.stdout.write(`${site.id}\n`)
setInterval(() => undefined, 1_000)
