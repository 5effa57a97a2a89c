import { existsSync, mkdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join, relative } from 'node:path'
import { fingerprint } from './fingerprint.mjs'
import { DIST, ROOT, SCRATCH } from './paths.mjs'
import { runNode } from './run.mjs'

/**
 * @typedef {object} Build
 * @property {string} name
 * @property {readonly string[]} sources whose change makes it out of date
 * @property {string} product there when it was built
 * @property {string} tool
 * @property {readonly string[]} args
 */

/** @type {readonly Build[]} */
const BUILDS = [
  {
    name: 'server',
    sources: ['core', 'server', 'tsconfig.json', 'package-lock.json'],
    product: 'dist/server/main.js',
    tool: 'node_modules/typescript/bin/tsc',
    args: ['-p', 'server/tsconfig.build.json'],
  },
  {
    name: 'page',
    sources: ['core', 'web', 'tsconfig.json', 'package-lock.json'],
    product: 'dist/web/index.html',
    tool: 'node_modules/vite/bin/vite.js',
    args: ['build', '--config', 'web/vite.config.ts', '--logLevel', 'warn'],
  },
]

/** @returns {Build[]} the builds whose sources changed since, or that are missing */
export function outOfDate() {
  return BUILDS.filter(
    (build) => !existsSync(join(ROOT, build.product)) || read(stampOf(build)) !== fingerprintOf(build),
  )
}

/**
 * @param {Build} build
 * @param {(text: string) => void} say
 * @returns {Promise<void>}
 * @throws {Error} in one sentence, with the tool's own output above it
 */
export async function make(build, say) {
  say(`Building the ${build.name}.`)
  const stamp = stampOf(build)
  // The stamp goes first and comes last: a build that was cut short is made again.
  rmSync(stamp, { force: true })
  const before = fingerprintOf(build)
  const log = join(SCRATCH, `${build.name}.log`)
  const code = await runNode(join(ROOT, build.tool), build.args, { log })
  if (code !== 0) {
    process.stderr.write(read(log) ?? '')
    throw new Error(`Building the ${build.name} failed; the same output is in ${relative(ROOT, log)}.`)
  }
  mkdirSync(DIST, { recursive: true })
  writeFileSync(stamp, before)
}

/** @param {Build} build */
function stampOf(build) {
  return join(DIST, `.${build.name}-stamp`)
}

/** @param {Build} build */
function fingerprintOf(build) {
  return fingerprint(ROOT, build.sources, (name) => !name.startsWith('server/launch/'))
}

/** @param {string} file */
function read(file) {
  return existsSync(file) ? readFileSync(file, 'utf8') : undefined
}
