// One case of the cost bench in a process of its own, so that it starts cold and its memory is its own.
import { readFileSync } from 'node:fs'
import { deserialize } from 'node:v8'
import { findings } from '../../core/findings/findings.ts'
import type { Evidence } from '../../core/timeline/evidence.ts'
import { openAnalysis } from '../../server/analysis/analysis.ts'
import { openStore } from '../../server/store/sqlite/index.ts'
import { type Stages, stagesOf } from './cost-stages.ts'

/** What is asked: findings of evidence that lies in a file, or of a site in a store. */
export type CostCase =
  | { readonly evidence: string }
  | {
      readonly store: string
      readonly site: string
      readonly warmUp: string
      readonly from: number
      readonly to: number
    }

export interface CostTold {
  /** The first findings of this process, ms. */
  readonly cold: number
  /** The same again, and again: the lesser, ms. */
  readonly warm: number
  /** Greatest resident memory of the process so far, MB. */
  readonly coldMb: number
  readonly mb: number
  readonly stages: Stages
}

export const AS_COST_PROCESS = '--cost-case'

if (process.argv.includes(AS_COST_PROCESS)) {
  process.on('message', (asked: CostCase) => {
    void answer(asked).then((told) => process.send?.(told, () => process.exit(0)))
  })
  process.send?.('ready')
}

function answer(asked: CostCase): Promise<CostTold> {
  return 'evidence' in asked ? fromEvidence(asked.evidence) : fromStore(asked)
}

async function fromEvidence(file: string): Promise<CostTold> {
  const evidence = deserialize(readFileSync(file)) as Evidence
  const cold = await timed(() => findings(evidence))
  const coldMb = residentMb()
  const again = [await timed(() => findings(evidence)), await timed(() => findings(evidence))]
  return { cold, warm: Math.min(...again), coldMb, mb: residentMb(), stages: stagesOf(evidence) }
}

/** Asks as a route does. Another site is asked first, so that the worker stands; the weeks asked differ by a second, so none is kept. */
async function fromStore(asked: Exclude<CostCase, { readonly evidence: string }>): Promise<CostTold> {
  const store = await openStore(asked.store)
  const analysis = openAnalysis({ store, file: asked.store, now: () => asked.to })
  const [site, other] = [await store.site(asked.site), await store.site(asked.warmUp)]
  if (site === undefined || other === undefined) throw new Error('the store of the cost bench has lost a site')
  await analysis.findings(other, 'A', null, null)
  const cold = await timed(() => analysis.findings(site, 'A', asked.from, asked.to))
  const coldMb = residentMb()
  const again: number[] = []
  for (const later of [1_000, 2_000]) {
    again.push(await timed(() => analysis.findings(site, 'A', asked.from + later, asked.to)))
  }
  await analysis.close()
  await store.close()
  return { cold, warm: Math.min(...again), coldMb, mb: residentMb(), stages: {} }
}

async function timed(work: () => unknown): Promise<number> {
  const began = performance.now()
  await work()
  return performance.now() - began
}

function residentMb(): number {
  return process.resourceUsage().maxRSS / 1_000
}
