// `npm start` and `npm run demo`: start.mjs VERB [flags…]. Prepares the checkout, then becomes the server: the built
// main.js runs in this very process, so that signals and exit codes are the server's own.
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import { DIST } from './paths.mjs'
import { prepare } from './prepare.mjs'

if (!(await prepare())) process.exit(1)
const main = join(DIST, 'server', 'main.js')
process.argv[1] = main
await import(pathToFileURL(main).href)
