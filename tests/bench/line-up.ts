// Does the line-up find the truth? Kinds of simulated sites × seeds, scored; two yardsticks that everybody could compute beside it.
// LINE_UP_SEEDS (10; 50 for a full verdict), LINE_UP_FIRST (first seed, 1) and LINE_UP_KINDS (all; comma-separated) choose what is run.
import { fork } from 'node:child_process'
import { availableParallelism } from 'node:os'
import { fileURLToPath } from 'node:url'
import { SCENARIOS } from '../../core/simulate/scenarios/scenarios.ts'
import type { Measure } from './harness.ts'
import { AS_HELPER, READY, type SiteJob, type SiteScore } from './line-up-site.ts'
import { summaryOf } from './score.ts'

export const name = 'line-up: simulated sites with hidden truth'

/** Runs all; prints a line for each kind, answers with the figures over all kinds. */
export async function run(): Promise<Measure[]> {
  const seeds = Number(process.env.LINE_UP_SEEDS ?? 10)
  const first = Number(process.env.LINE_UP_FIRST ?? 1)
  const wanted = process.env.LINE_UP_KINDS?.split(',')
  const kinds = Object.keys(SCENARIOS).filter((kind) => wanted === undefined || wanted.includes(kind))
  const jobs = kinds.flatMap((kind) => Array.from({ length: seeds }, (_, k): SiteJob => ({ kind, seed: first + k })))
  const sites = await scored(jobs)
  console.log(HEAD)
  let beaten = 0
  for (const kind of kinds) {
    const here = sites.filter((site) => site.kind === kind)
    console.log(row(kind, here))
    const right = shareOf(here, ({ score }) => score.right)
    const best = Math.max(
      shareOf(here, ({ often }) => often),
      shareOf(here, ({ ratio }) => ratio),
    )
    if (right > best || right === 100) beaten++
  }
  const sum = summaryOf(sites.map(({ score }) => score))
  const nothing = sites.filter(({ kind }) => kind === 'nothing')
  const spent = sites.reduce((total, site) => total + site.spent, 0)
  return [
    { what: `first suspect right, ${sites.length} sites`, value: sum.right, unit: '%', target: '≥ 95' },
    { what: 'mean probability given to the truth', value: sum.toTruth, unit: '' },
    { what: 'sites with a false strong suspect', value: sum.falseStrong, unit: '%', target: '≤ 1' },
    {
      what: 'none first where nothing is behind it',
      value: shareOf(nothing, (s) => s.score.right),
      unit: '%',
      target: '≥ 90',
    },
    { what: 'Brier score over all suspects', value: sum.brier, unit: '', target: '≤ 0.06' },
    ...sum.reliability,
    { what: 'yardstick: load most often running at trips is right', value: shareOf(sites, (s) => s.often), unit: '%' },
    { what: 'yardstick: greatest plain rate ratio is right', value: shareOf(sites, (s) => s.ratio), unit: '%' },
    {
      what: `kinds of ${kinds.length} better than both yardsticks, or perfect`,
      value: beaten,
      unit: '',
      target: 'all',
    },
    { what: 'findings, mean time a site', value: spent / Math.max(1, sites.length), unit: 'ms' },
  ]
}

/** Deals the sites out to as many processes as there are cores. */
async function scored(jobs: readonly SiteJob[]): Promise<SiteScore[]> {
  const done: SiteScore[] = []
  let next = 0
  const helper = (): Promise<void> =>
    new Promise((resolve, reject) => {
      const child = fork(fileURLToPath(new URL('./line-up-site.ts', import.meta.url)), [AS_HELPER], {
        execArgv: ['--import', 'tsx'],
      })
      let busy = false
      const give = (): void => {
        const job = jobs[next++]
        busy = job !== undefined
        if (job === undefined) child.disconnect()
        else child.send(job)
      }
      child.on('message', (site) => {
        if (site !== READY) done.push(site as SiteScore)
        give()
      })
      child.on('error', reject)
      child.on('exit', () => (busy ? reject(new Error('a helper of the line-up bench ended early')) : resolve()))
    })
  await Promise.all(Array.from({ length: Math.min(jobs.length, availableParallelism()) }, helper))
  return done.sort((a, b) => a.seed - b.seed)
}

function shareOf(sites: readonly SiteScore[], is: (site: SiteScore) => boolean): number {
  return (100 * sites.filter(is).length) / Math.max(1, sites.length)
}

const HEAD = `${'kind'.padEnd(22)} right  P(truth)  false strong  Brier   often  ratio   missed (seed: first suspect)`

function row(kind: string, sites: readonly SiteScore[]): string {
  const { right, toTruth, falseStrong, brier } = summaryOf(sites.map(({ score }) => score))
  const percent = (value: number): string => `${Math.round(value)}%`
  const missed = sites.flatMap(({ seed, score }) =>
    score.right ? [] : [`${seed}: ${score.first} ${score.firstProbability.toFixed(2)}`],
  )
  return [
    kind.padEnd(22),
    percent(right).padStart(5),
    toTruth.toFixed(2).padStart(9),
    percent(falseStrong).padStart(13),
    brier.toFixed(3).padStart(7),
    percent(shareOf(sites, ({ often }) => often)).padStart(6),
    percent(shareOf(sites, ({ ratio }) => ratio)).padStart(6),
    `  ${missed.slice(0, 5).join('; ')}`,
  ].join(' ')
}
