// What findings cost: a week at 1 Hz, a year at one minute, and how time grows with weeks, trips and loads.
// COST_CASES (all; comma-separated of week, year, weeks, trips, loads) chooses what is run.
import { fork } from 'node:child_process'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { serialize } from 'node:v8'
import { evidenceOf, type Simulated } from '../../core/simulate/simulated.ts'
import { openStore } from '../../server/store/sqlite/index.ts'
import { AS_COST_PROCESS, type CostCase, type CostTold } from './cost-process.ts'
import { costSite } from './cost-site.ts'
import type { Measure } from './harness.ts'

export const name = 'cost: findings from cold, and how it grows'

const WEEK = { days: 7, intervalMs: 1_000, loads: 30, trips: 20 }
const YEAR = { days: 365, intervalMs: 60_000, loads: 30, trips: 200 }
const READINGS_A_TRANSACTION = 100_000

/** The two sites of the aims, with their stages; then growth, each case in a process of its own. */
export async function run(): Promise<Measure[]> {
  const folder = mkdtempSync(join(tmpdir(), 'leaktide-cost-'))
  const wanted = process.env.COST_CASES?.split(',')
  const asked = (what: string): boolean => wanted === undefined || wanted.includes(what)
  try {
    const measures: Measure[] = []
    if (asked('week')) {
      const site = costSite(WEEK)
      const week = await fromEvidence(folder, site)
      measures.push(...figures(`a week at 1 Hz, ${sizeOf(site)}`, week, '< 2,000 ms', '< 500 MB'))
      measures.push(...(await fromStore(folder, site)))
    }
    if (asked('year')) {
      const site = costSite(YEAR)
      const year = await fromEvidence(folder, site)
      measures.push(...figures(`a year at 1 min, states too, ${sizeOf(site)}`, year, '< 3,000 ms'))
      const calm = costSite({ ...YEAR, statesMs: 15 * 60_000 })
      const told = await fromEvidence(folder, calm)
      measures.push(...figures(`a year at 1 min, states as they change, ${sizeOf(calm)}`, told, '< 3,000 ms'))
    }
    if (asked('weeks')) {
      const growing = [1, 2, 4, 8].map((weeks) => ({ ...WEEK, days: 7 * weeks, trips: 20 * weeks }))
      measures.push(...(await growth(folder, growing, ({ days }) => `${days / 7} weeks at 1 Hz, 20 trips each`)))
      measures.push(
        ...(await growth(
          folder,
          growing.map((wish) => ({ ...wish, trips: 20 })),
          ({ days }) => `${days / 7} weeks at 1 Hz, 20 trips in all`,
        )),
      )
    }
    if (asked('trips')) {
      const growing = [10, 50, 200].map((trips) => ({ ...YEAR, days: 90, trips }))
      measures.push(...(await growth(folder, growing, ({ trips }) => `90 days at 1 min, about ${trips} trips`)))
    }
    if (asked('loads')) {
      const growing = [10, 30, 60].map((loads) => ({ ...YEAR, days: 90, trips: 20, loads }))
      measures.push(...(await growth(folder, growing, ({ loads }) => `90 days at 1 min, ${loads} loads`)))
    }
    return measures
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}

function sizeOf({ series, trips, switchings }: Simulated): string {
  const readings = [...series.values()].reduce((sum, { t }) => sum + t.length, 0)
  return `${(readings / 1e6).toFixed(1)} million readings, ${trips.length} trips, ${switchings.length} switchings`
}

function figures(what: string, told: CostTold, time: string, memory?: string): Measure[] {
  return [
    { what: `${what}: first in its process`, value: told.cold, unit: 'ms', target: time },
    { what: '  again', value: told.warm, unit: 'ms' },
    { what: '  memory', value: told.coldMb, unit: 'MB', ...(memory === undefined ? {} : { target: memory }) },
    ...Object.entries(told.stages).map(([stage, ms]) => ({ what: `    ${stage}`, value: ms, unit: 'ms' })),
  ]
}

/** Times with the ratio to the case before. */
async function growth<Wish extends Parameters<typeof costSite>[0]>(
  folder: string,
  wishes: readonly Wish[],
  words: (wish: Wish) => string,
): Promise<Measure[]> {
  const measures: Measure[] = []
  let before = Number.NaN
  for (const wish of wishes) {
    const told = await fromEvidence(folder, costSite(wish))
    measures.push({ what: `${words(wish)}: again`, value: told.warm, unit: 'ms' })
    if (Number.isFinite(before)) measures.push({ what: '  to the line before', value: told.warm / before, unit: '×' })
    before = told.warm
  }
  return measures
}

function fromEvidence(folder: string, simulated: Simulated): Promise<CostTold> {
  const file = join(folder, 'evidence')
  writeFileSync(file, serialize(evidenceOf(simulated)))
  return inItsProcess({ evidence: file })
}

/** The way of a question through the server: a data file, a worker with its own connection. */
async function fromStore(folder: string, simulated: Simulated): Promise<Measure[]> {
  const file = join(folder, 'leaktide.db')
  const store = await openStore(file)
  const act = { by: 'bench', at: simulated.from }
  const { id: site } = await store.createSite(simulated.sheet, act)
  const { id: warmUp } = await store.createSite({ ...simulated.sheet, channels: [] }, act)
  for (const [channel, { t, v }] of simulated.series) {
    for (let i = 0; i < t.length; i += READINGS_A_TRANSACTION) {
      const end = i + READINGS_A_TRANSACTION
      await store.append(site, [{ channel, t: t.subarray(i, end), v: v.subarray(i, end) }])
    }
  }
  await store.keep(site, 'trip', simulated.trips, act)
  await store.keep(site, 'switching', simulated.switchings, act)
  while ((await store.settle(READINGS_A_TRANSACTION)) > 0);
  await store.close()
  const told = await inItsProcess({ store: file, site, warmUp, from: simulated.from, to: simulated.to })
  return [
    { what: '  the same from a store on disk, through a worker', value: told.cold, unit: 'ms', target: '< 2,000 ms' },
    { what: '  again, a second less', value: told.warm, unit: 'ms' },
    { what: '  memory of the whole process, after the first', value: told.coldMb, unit: 'MB', target: '< 500 MB' },
    { what: '  memory after three', value: told.mb, unit: 'MB' },
  ]
}

function inItsProcess(asked: CostCase): Promise<CostTold> {
  return new Promise((resolve, reject) => {
    const child = fork(fileURLToPath(new URL('./cost-process.ts', import.meta.url)), [AS_COST_PROCESS], {
      execArgv: ['--import', 'tsx'],
    })
    let told: CostTold | undefined
    child.on('message', (message) => {
      if (message === 'ready') child.send(asked)
      else told = message as CostTold
    })
    child.on('error', reject)
    child.on('exit', () => (told ? resolve(told) : reject(new Error('a case of the cost bench ended early'))))
  })
}
