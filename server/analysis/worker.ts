import { workerData } from 'node:worker_threads'
import { findings } from '../../core/findings/findings.ts'
import { openReader } from '../store/sqlite/index.ts'
import { TooMuch } from './limits.ts'
import { loadEvidence } from './load-evidence.ts'

/** What a worker is asked: plain values, so that they cross its border. */
export interface Task {
  readonly site: string
  readonly rcd: string
  readonly from: number | null
  readonly to: number | null
}

/** What it answers: findings as JSON with the revision they were computed from, or why there are none. */
export type Told =
  | { readonly body: string; readonly revision: number | null }
  | { readonly tooMuch: string }
  | { readonly gone: true }

// Piscina hands its own data over beside that of the pool's maker.
const file = ([workerData].flat().find((data) => typeof data?.file === 'string') as { readonly file: string }).file
const reader = openReader(file)

/** Loads what is known and computes the findings. The revision is null when the site changed meanwhile. */
export default async function work(task: Task): Promise<Told> {
  const store = await reader
  const site = await store.site(task.site)
  if (site === undefined) return { gone: true }
  try {
    const evidence = await loadEvidence(store, { site, rcd: task.rcd, from: task.from, to: task.to })
    const after = await store.site(task.site)
    const body = JSON.stringify(findings(evidence))
    return { body, revision: after?.revision === site.revision ? site.revision : null }
  } catch (error) {
    if (error instanceof TooMuch) return { tooMuch: error.message }
    throw error
  }
}
