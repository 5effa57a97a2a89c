// `npm run bench [-- NAME…]`: runs every module of this folder that exports `name` and `run`, each in a process of its own,
// and prints what it measured. It judges nothing: the aims stand beside the figures.
import { fork } from 'node:child_process'
import { readdirSync } from 'node:fs'
import { basename, join } from 'node:path'
import { fileURLToPath, pathToFileURL } from 'node:url'
import { type Bench, circumstances, type Measure, table } from './harness.ts'

const HERE = fileURLToPath(new URL('.', import.meta.url))
const NO_BENCH = new Set(['run.ts', 'harness.ts'])

/** What a bench's process tells; a file beside the benches that is none of them tells `undefined`. */
type Told = { readonly name: string; readonly measures: readonly Measure[] } | undefined

if (process.send) await measure(process.argv[2] ?? '')
else await runAll(process.argv.slice(2))

async function runAll(wanted: readonly string[]): Promise<void> {
  const files = readdirSync(HERE)
    .filter((file) => file.endsWith('.ts') && !file.endsWith('.test.ts') && !NO_BENCH.has(file))
    .filter((file) => wanted.length === 0 || wanted.includes(basename(file, '.ts')))
    .sort()
  console.log(circumstances())
  for (const file of files) {
    const told = await tellOf(join(HERE, file))
    if (told === 'failed') console.log(`\n${basename(file, '.ts')} did not finish; its error stands above.`)
    else if (told) console.log(`\n${told.name}\n${table(told.measures)}`)
  }
  for (const name of wanted) {
    if (!files.includes(`${name}.ts`)) console.log(`\nThere is no bench "${name}".`)
  }
}

function tellOf(file: string): Promise<Told | 'failed'> {
  return new Promise((resolve) => {
    const child = fork(fileURLToPath(import.meta.url), [file], { execArgv: ['--import', 'tsx', '--expose-gc'] })
    let told: Told
    child.on('message', (message) => {
      told = (message as { told: Told }).told
    })
    child.on('close', (code) => resolve(code === 0 ? told : 'failed'))
  })
}

async function measure(file: string): Promise<void> {
  const bench = (await import(pathToFileURL(file).href)) as Partial<Bench>
  const told: Told = bench.run && bench.name ? { name: bench.name, measures: await bench.run() } : undefined
  // Leaves even where the bench left something open, but only once the figures are out.
  process.send?.({ told }, () => process.exit(0))
}
