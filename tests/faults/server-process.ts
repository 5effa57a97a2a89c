import { type ChildProcess, spawn } from 'node:child_process'
import { once } from 'node:events'
import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { setTimeout as sleep } from 'node:timers/promises'
import { make, outOfDate } from '../../server/launch/build.mjs'
import { withLock } from '../../server/launch/lock.mjs'
import { ROOT, SCRATCH } from '../../server/launch/paths.mjs'

/** Sets the owner's key of every server in these tests. */
export const OWNER_KEY = 'owner-key-of-the-fault-tests-0123456789'

/** How a server process ended. */
export interface Ending {
  readonly code: number | null
  readonly signal: NodeJS.Signals | null
  /** Everything it printed. */
  readonly output: string
}

/** A real server in a process of its own. */
export interface ServerProcess {
  readonly url: string
  /** Sends the signal, once or more, and waits for the end. */
  end(signal: NodeJS.Signals, times?: number): Promise<Ending>
}

/** Builds the server where its sources changed: these tests run what `npm start` runs. */
export async function buildServer(): Promise<void> {
  await withLock(join(SCRATCH, 'lock'), {}, async () => {
    for (const build of outOfDate()) if (build.name === 'server') await make(build, () => undefined)
  })
}

/** A data folder that `remove` takes away again. */
export function temporaryFolder(): { readonly path: string; remove(): void } {
  const path = mkdtempSync(join(tmpdir(), 'leaktide-fault-'))
  return { path, remove: () => rmSync(path, { recursive: true, force: true }) }
}

/** Starts a server and waits until it listens. @throws {Error} with its output when it ends before. */
export async function startServer(data: string, env: Readonly<Record<string, string>> = {}): Promise<ServerProcess> {
  const { child, ended } = launch(data, env)
  const listening = new Promise<string>((resolve) => {
    let seen = ''
    child.stdout?.on('data', (piece) => {
      seen += String(piece)
      const url = /listening on (http\S+)/.exec(seen)?.[1]
      if (url) resolve(url)
    })
  })
  const first = await Promise.race([listening, ended])
  if (typeof first !== 'string')
    throw new Error(`the server ended with ${first.code} before it listened:\n${first.output}`)
  return {
    url: first,
    end: async (signal, times = 1) => {
      for (let n = 0; n < times; n++) {
        child.kill(signal)
        if (n < times - 1) await sleep(20) // two that wait together would be delivered as one
      }
      return ended
    },
  }
}

/** Starts a server that is expected to refuse, and waits for its end. */
export function runServer(data: string): Promise<Ending> {
  return launch(data, {}).ended
}

function launch(data: string, env: Readonly<Record<string, string>>): { child: ChildProcess; ended: Promise<Ending> } {
  const main = join(ROOT, 'dist', 'server', 'main.js')
  const child = spawn(process.execPath, [main, 'serve', '--data', data, '--port', '0', '--host', '127.0.0.1'], {
    cwd: ROOT,
    env: { ...process.env, NODE_ENV: 'production', LEAKTIDE_OWNER_KEY: OWNER_KEY, ...env },
    stdio: ['ignore', 'pipe', 'pipe'],
  })
  let output = ''
  child.stdout?.on('data', (piece) => {
    output += String(piece)
  })
  child.stderr?.on('data', (piece) => {
    output += String(piece)
  })
  const ended = once(child, 'close').then(([code, signal]) => ({ code, signal, output }) as Ending)
  return { child, ended }
}
