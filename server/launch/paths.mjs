import { join } from 'node:path'
import { fileURLToPath } from 'node:url'

/** The project's folder, wherever the command was given. */
export const ROOT = fileURLToPath(new URL('../..', import.meta.url))

/** Logs, lock and test results of the launch step; git ignores it. */
export const SCRATCH = join(ROOT, '.build')

/** The built server, which holds the stamps of both builds beside it. */
export const DIST = join(ROOT, 'dist')
