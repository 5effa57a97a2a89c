// `npm run bench [-- NAME…]`: prepares the checkout, then measures.
import { join } from 'node:path'
import { ROOT } from './paths.mjs'
import { prepare } from './prepare.mjs'
import { run, stopChildrenOnSignal } from './run.mjs'

if (!(await prepare())) process.exit(1)
stopChildrenOnSignal()
const bench = join(ROOT, 'tests', 'bench', 'run.ts')
process.exitCode = await run(process.execPath, ['--import', 'tsx', bench, ...process.argv.slice(2)])
