import { createHash } from 'node:crypto'
import { existsSync, readFileSync, writeFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import { delimiter, join, relative } from 'node:path'
import { ROOT, SCRATCH } from './paths.mjs'
import { run, runNode } from './run.mjs'

const MODULES = join(ROOT, 'node_modules')
const STAMP = join(MODULES, '.leaktide-stamp')
const LOG = join(SCRATCH, 'npm-ci.log')

/** What compiles better-sqlite3 where no ready-made binary can be fetched. */
const COMPILERS = ['python3', 'make', 'g++']

/**
 * True when node_modules holds what package-lock.json names, for this Node.js. A tree that somebody else installed by
 * `npm ci` counts too, once it has been compared.
 * @returns {boolean}
 */
export function isInstalled() {
  const want = stamp()
  if (existsSync(STAMP)) return readFileSync(STAMP, 'utf8') === want
  if (!matchesLock() || !databaseLoads()) return false
  writeFileSync(STAMP, want)
  return true
}

/**
 * Installs the locked dependencies.
 * @param {(text: string) => void} say
 * @returns {Promise<void>}
 * @throws {Error} in one sentence for the person at the terminal
 */
export async function install(say) {
  say(
    'Installing the locked dependencies; better-sqlite3 may have to be compiled, which takes about 75 to 95 seconds, once.',
  )
  // --include=dev: the build tools are development dependencies, also where NODE_ENV says production.
  const args = ['ci', '--include=dev', '--no-audit', '--no-fund', '--loglevel=warn', '--foreground-scripts']
  const npm = process.env.npm_execpath
  const code = npm?.endsWith('.js')
    ? await runNode(npm, args, { log: LOG })
    : await run(process.platform === 'win32' ? 'npm.cmd' : 'npm', args, { log: LOG })
  if (code !== 0) throw new Error(whyInstallFailed(code, readFileSync(LOG, 'utf8'), missingCompilers()))
  writeFileSync(STAMP, stamp())
}

/**
 * @param {number} code of npm
 * @param {string} output of npm
 * @param {readonly string[]} missing compilers that this machine lacks
 * @returns {string}
 */
export function whyInstallFailed(code, output, missing) {
  const where = `npm's output is in ${relative(ROOT, LOG)}`
  if (code === 127) return 'npm was not found: install npm (it comes with Node.js) and start again.'
  if (missing.length > 0 && /gyp|better-sqlite3|prebuild/.test(output)) {
    const names = new Intl.ListFormat('en').format(missing)
    return `better-sqlite3 has to be compiled here, but ${names} ${missing.length > 1 ? 'are' : 'is'} missing: install ${missing.length > 1 ? 'them' : 'it'} (on Debian: apt-get install ${missing.join(' ')}) and start again; ${where}.`
  }
  const lines = output.split('\n').filter((line) => line.startsWith('npm error') && !line.includes('complete log'))
  return `Installing the dependencies failed (npm ended with ${code}: ${lines[0] ?? 'no reason given'}); ${where}.`
}

/** @returns {string[]} */
function missingCompilers() {
  const folders = (process.env.PATH ?? '').split(delimiter)
  return COMPILERS.filter((name) => !folders.some((folder) => existsSync(join(folder, name))))
}

/** The lock, and what compiled code depends on. @returns {string} */
function stamp() {
  const lock = createHash('sha256')
    .update(readFileSync(join(ROOT, 'package-lock.json')))
    .digest('hex')
  return `${lock} ${process.platform} ${process.arch} ${process.versions.modules}\n`
}

/**
 * Compares the lock with the record that npm keeps of what it installed.
 * @returns {boolean}
 */
function matchesLock() {
  const record = join(MODULES, '.package-lock.json')
  if (!existsSync(record)) return false
  const locked = JSON.parse(readFileSync(join(ROOT, 'package-lock.json'), 'utf8')).packages
  const installed = JSON.parse(readFileSync(record, 'utf8')).packages
  return Object.entries(locked).every(([name, want]) => {
    const got = installed[name]
    return name === '' || (got ? got.version === want.version : want.optional === true)
  })
}

/** @returns {boolean} false when it was compiled for another Node.js, or not at all */
function databaseLoads() {
  try {
    const Database = createRequire(import.meta.url)('better-sqlite3')
    new Database(':memory:').close()
    return true
  } catch {
    return false
  }
}
