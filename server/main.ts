import { demo, type PostDemo } from './demo.ts'
import { type Serving, serve } from './serve.ts'
import { readSettings, SettingsError } from './settings.ts'
import { StoreError } from './store/port.ts'

/** The process: settings, listen, signals. */
async function main(): Promise<void> {
  const settings = readSettings(process.argv.slice(2))
  const stopping = signalled()
  if (settings.verb === 'demo') {
    const serving = await Promise.race([demo(settings, await demoPoster(), say), stopping])
    await stopping
    await serving?.stop()
    return
  }
  const serving = await serve(settings)
  tell(serving)
  await stopping
  await serving.stop()
}

/** Loaded on demand: a server at work has no use for the simulator behind the demo. */
async function demoPoster(): Promise<PostDemo> {
  const extension = import.meta.url.endsWith('.ts') ? 'ts' : 'js'
  const { postDemo } = (await import(new URL(`./demo/post-demo.${extension}`, import.meta.url).href)) as {
    readonly postDemo: PostDemo
  }
  return postDemo
}

function tell({ url, madeKey, warnings }: Serving): void {
  for (const warning of warnings) process.stderr.write(`${warning}\n`)
  if (madeKey !== undefined) say(`owner key, shown this once: ${madeKey}`)
  say(`listening on ${url}`)
}

function say(line: string): void {
  process.stdout.write(`${line}\n`)
}

/** Two signals closer than this are one key press: Ctrl-C reaches this process, and npm passes it on once more. */
const ONE_PRESS_MS = 1_000

/** Resolves with the first signal to stop; a later one ends the process at once. */
function signalled(): Promise<void> {
  return new Promise((resolve) => {
    let first: number | undefined
    const stop = (): void => {
      const at = performance.now()
      if (first !== undefined && at - first > ONE_PRESS_MS) process.exit(1)
      first ??= at
      resolve()
    }
    process.on('SIGTERM', stop)
    process.on('SIGINT', stop)
  })
}

/** Why the server cannot start, for the causes that a person can do something about. */
function explain(error: unknown): string | undefined {
  if (error instanceof SettingsError || error instanceof StoreError) return error.message
  if (!(error instanceof Error) || !('code' in error)) return undefined
  switch (error.code) {
    case 'EADDRINUSE':
      return 'Another program already listens on this address; choose another with --port.'
    case 'EADDRNOTAVAIL':
    case 'ENOTFOUND':
      return 'This machine does not have that address; choose another with --host.'
    case 'EACCES':
    case 'EPERM':
    case 'EROFS':
    case 'ENOTDIR':
    case 'EEXIST':
    case 'SQLITE_CANTOPEN':
      return `The data folder or the port cannot be used: ${error.message}`
    default:
      return undefined
  }
}

main().then(
  () => process.exit(0),
  (error: unknown) => {
    const sentence = explain(error)
    process.stderr.write(`${sentence ?? (error instanceof Error ? error.stack : String(error))}\n`)
    process.exit(1)
  },
)
