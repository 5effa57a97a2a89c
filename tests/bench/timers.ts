// Are timers that nobody listed found, how small, under what, and is none claimed that is not there; and what does it cost.
// Made-up levels of 15 mA with a slow wander; real loads of a household, none of them named, in a second run.
import { fileURLToPath } from 'node:url'
import type { TimedSchedule } from '../../core/findings/timed/schedule.ts'
import { timedClusters } from '../../core/findings/timed/timed-clusters.ts'
import { seededRandom } from '../../core/statistics/random.ts'
import type { Series } from '../../core/timeline/series.ts'
import { afterSunset, daily, every, type MadeRemainder, madeRemainder } from '../core/findings/timed/made-remainder.ts'
import { MINUTE, timelineOf } from '../core/findings/timeline-of.ts'
import { realLoads } from '../scenarios/real-data.ts'
import { type Measure, median } from './harness.ts'

export const name = 'timers: loads that nobody listed, found in the leakage'

const DAYS = 21
const SEEDS = 20
const HEIGHTS = [0.3, 0.5, 1, 2] as const

/** Kinds of timers by the schedule that is right. */
const KINDS: readonly { readonly kind: TimedSchedule['kind']; readonly what: string; readonly starts: number[] }[] = [
  { kind: 'clock', what: 'time switch', starts: daily(DAYS, 3.2, 1) },
  { kind: 'clock', what: 'time switch on workdays', starts: daily(DAYS, 9.4, 1, [0, 1, 2, 3, 4]) },
  { kind: 'period', what: 'timer of 7.4 h', starts: every(DAYS, 7.4, 2) },
  { kind: 'sun', what: 'photocell', starts: afterSunset(DAYS, 15) },
]

export async function run(): Promise<Measure[]> {
  const measures: Measure[] = []
  for (const background of [{}, { people: true, cycling: true }]) {
    const where = 'people' in background ? 'under loads of people and a compressor' : 'on a quiet level'
    for (const ma of HEIGHTS) {
      for (const { kind, what, starts } of KINDS) {
        let found = 0
        for (let seed = 0; seed < SEEDS; seed++) {
          const made = { days: DAYS, timers: [{ ma, minutes: 40, starts }], ...background }
          if (kindsIn(made, seed).includes(kind)) found++
        }
        measures.push({ what: `${what} of ${ma} mA ${where}: found`, value: (100 * found) / SEEDS, unit: '%' })
      }
    }
    let claimed = 0
    for (let seed = 0; seed < 3 * SEEDS; seed++) {
      if (kindsIn({ days: DAYS, timers: [], ...background }, 1_000 + seed).length > 0) claimed++
    }
    measures.push({
      what: `no timer ${where}: one claimed`,
      value: (100 * claimed) / (3 * SEEDS),
      unit: '%',
      target: '≤ 1',
    })
  }
  measures.push(...onRealLoads(), ...costs())
  return measures
}

function kindsIn(made: MadeRemainder, seed: number): string[] {
  const found = timedClusters(timelineOf({ days: made.days }), madeRemainder(made, seed))
  return found.map(({ schedule }) => schedule.kind)
}

/** 44 and 15 days of real loads (fixtures/data), each leaking as it runs, with a time switch of 1.3 mA on top or without. */
function onRealLoads(): Measure[] {
  let [found, claimed, sites] = [0, 0, 0]
  for (const house of ['house-b', 'house-c'] as const) {
    const { loads, from, to } = realLoads(house)
    const timeline = timelineOf({ from, to, zone: 'Europe/Berlin' })
    for (let seed = 0; seed < SEEDS; seed++) {
      const random = seededRandom(`${house} ${seed}`)
      const t = loads[0]!.running.t
      const v = Float64Array.from(t, () => 10 + random.normal(0, 0.05))
      for (const { running } of loads) {
        const ma = Math.exp(random.normal(Math.log(0.8), 0.6))
        const at = new Map(Array.from(running.t, (time, i) => [time, running.v[i]!]))
        for (let i = 0; i < v.length; i++) v[i]! += ma * (at.get(t[i]!) ?? 0)
      }
      const start = random.integer(1_400)
      const planted = v.map((x, i) => {
        const minute = ((t[i]! - from) / MINUTE) % 1_440
        return minute >= start && minute < start + 35 ? x + 1.3 : x
      })
      sites++
      if (timedClusters(timeline, { t, v }).length > 0) claimed++
      if (timedClusters(timeline, { t, v: planted }).some(({ schedule }) => schedule.kind === 'clock')) found++
    }
  }
  return [
    { what: 'time switch of 1.3 mA on real loads, none named: found', value: (100 * found) / sites, unit: '%' },
    { what: 'real loads, none named: a timer claimed', value: (100 * claimed) / sites, unit: '%', target: '≤ 1' },
  ]
}

function costs(): Measure[] {
  return [7, 28, 365].map((days) => {
    const timeline = timelineOf({ days })
    const starts = daily(days, 3.2, 1)
    const remainder: Series = madeRemainder({ days, timers: [{ ma: 1, minutes: 40, starts }], people: true }, 1)
    const spent = Array.from({ length: 5 }, () => {
      const began = performance.now()
      timedClusters(timeline, remainder)
      return performance.now() - began
    })
    return { what: `${days} days of minutes`, value: median(spent), unit: 'ms' }
  })
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  for (const { what, value, unit } of await run()) console.log(`${what}: ${value.toFixed(1)} ${unit}`)
}
