import { createHash } from 'node:crypto'
import { Piscina } from 'piscina'
import { FINDINGS_VERSION } from '../../core/findings/findings.ts'
import { type SiteRecord, type Store, StoreError } from '../store/port.ts'
import { TooBusy, TooMuch } from './limits.ts'
import type { Task, Told } from './worker.ts'

/** The findings of one question. */
export interface Analysed {
  /** The findings as JSON. */
  readonly body: string
  /** Of what they were computed from; the same tag means the same bytes. */
  readonly tag: string
}

/** Answers questions about devices, away from the event loop. */
export interface Analysis {
  /** The tag that the answer would carry now. */
  tag(site: SiteRecord, rcd: string, from: number | null, to: number | null): string
  /** @throws {TooBusy} no room, or it took too long; {TooMuch}; {StoreError} no_such_site */
  findings(site: SiteRecord, rcd: string, from: number | null, to: number | null): Promise<Analysed>
  close(): Promise<void>
}

export interface AnalysisOptions {
  readonly store: Pick<Store, 'cachedFindings' | 'cacheFindings'>
  /** The data file; workers open it for reading on their own. */
  readonly file: string
  readonly now: () => number
  readonly workers?: number
  readonly timeoutMs?: number
  readonly queue?: number
}

/** A pool of workers that starts with the first question and goes away when nobody asks. */
export function openAnalysis(options: AnalysisOptions): Analysis {
  const { store, file, now, workers = 1, timeoutMs = 60_000, queue = 32 } = options
  const typescript = import.meta.url.endsWith('.ts')
  const pool = new Piscina<Task, Told>({
    filename: new URL(typescript ? './worker.ts' : './worker.js', import.meta.url).href,
    execArgv: typescript ? ['--import', 'tsx'] : [],
    workerData: { file },
    minThreads: 0,
    maxThreads: workers,
    idleTimeout: 60_000,
    recordTiming: false,
  })
  const running = new Map<string, Promise<Analysed>>()

  async function compute(task: Task, tag: string): Promise<Analysed> {
    const kept = await store.cachedFindings(tag)
    if (kept !== undefined) return { body: kept, tag }
    const told = await ask(task)
    if ('gone' in told) throw new StoreError('no_such_site', 'There is no such site.')
    if ('tooMuch' in told) throw new TooMuch(told.tooMuch)
    if (told.revision !== null && tagOf(task, told.revision) === tag) await keep(task.site, tag, told.body)
    return { body: told.body, tag }
  }

  let asked = 0
  async function ask(task: Task): Promise<Told> {
    if (asked >= workers + queue) throw new TooBusy('Too many analyses are waiting; ask again in a moment.')
    asked++
    try {
      return await pool.run(task, { signal: AbortSignal.timeout(timeoutMs) })
    } catch (error) {
      if (!(error instanceof Error)) throw error
      if (error.name === 'AbortError') throw new TooBusy('The analysis took too long; ask for a shorter span.')
      if (/terminat/i.test(error.message)) throw new StoreError('closed', 'The server is shutting down.')
      throw error
    } finally {
      asked--
    }
  }

  /** The answer stands even where it cannot be kept. */
  async function keep(site: string, hash: string, body: string): Promise<void> {
    try {
      await store.cacheFindings({ hash, site, body, at: now() })
    } catch (error) {
      if (!(error instanceof StoreError)) throw error
    }
  }

  return {
    tag: (site, rcd, from, to) => tagOf({ site: site.id, rcd, from, to }, site.revision),
    findings: (site, rcd, from, to) => {
      const task = { site: site.id, rcd, from, to }
      const tag = tagOf(task, site.revision)
      const same = running.get(tag)
      if (same !== undefined) return same
      const answer = compute(task, tag).finally(() => running.delete(tag))
      running.set(tag, answer)
      return answer
    },
    close: () => pool.destroy(),
  }
}

function tagOf({ site, rcd, from, to }: Task, revision: number): string {
  const what = JSON.stringify([FINDINGS_VERSION, site, revision, rcd, from, to])
  return createHash('sha256').update(what).digest('base64url')
}
