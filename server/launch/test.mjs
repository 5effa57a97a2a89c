// `npm test [-- vitest arguments…]`: prepares the checkout, checks form and types, runs every test. The last line printed
// is `N passed, N failed`. With arguments only the named tests run, without the checks of form and types.
import { existsSync, mkdirSync, readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { findChromium } from './chromium.mjs'
import { ROOT, SCRATCH } from './paths.mjs'
import { prepare } from './prepare.mjs'
import { runNode, stopChildrenOnSignal } from './run.mjs'
import { tally } from './tally.mjs'

const tool = (/** @type {string} */ name) => join(ROOT, 'node_modules', name)
const tsc = tool('typescript/bin/tsc')

/** @type {readonly { name: string, tool: string, args: readonly string[] }[]} */
const CHECKS = [
  { name: 'format and lint', tool: tool('@biomejs/biome/bin/biome'), args: ['check', '.'] },
  ...['core', 'server', 'web', 'tests'].map((side) => ({ name: `types of ${side}`, tool: tsc, args: ['-p', side] })),
]

if (!(await prepare())) {
  console.log('0 passed, 1 failed')
  process.exit(1)
}

stopChildrenOnSignal()
const wanted = process.argv.slice(2)
let passed = 0
let failed = 0

if (wanted.length === 0) {
  for (const check of CHECKS) {
    const good = (await runNode(check.tool, check.args)) === 0
    console.log(`${good ? '✓' : '✗'} ${check.name}`)
    if (good) passed++
    else failed++
  }
}

const results = join(SCRATCH, 'tests.json')
rmSync(results, { force: true })
mkdirSync(SCRATCH, { recursive: true })

const chromium = findChromium()
const withoutBrowser = chromium === undefined && !process.env.CI
const code = await runNode(
  tool('vitest/vitest.mjs'),
  [
    'run',
    '--config',
    'tests/vitest.config.ts',
    '--reporter=default',
    '--reporter=json',
    `--outputFile.json=${results}`,
    ...(withoutBrowser ? ['--exclude=tests/browser/**'] : []),
    ...wanted,
  ],
  chromium ? { env: { LEAKTIDE_CHROMIUM: chromium } } : {},
)

const count = tally(existsSync(results) ? JSON.parse(readFileSync(results, 'utf8')) : undefined, code)
passed += count.passed
failed += count.failed

if (withoutBrowser) {
  console.log(
    'NOT RUN: the tests of the page in tests/browser, because no Chromium was found. Install it (on Debian: apt-get install chromium) or name it in LEAKTIDE_CHROMIUM.',
  )
}
process.exitCode = failed > 0 ? 1 : 0
console.log(`${passed} passed, ${failed} failed${count.skipped > 0 ? `, ${count.skipped} skipped` : ''}`)
