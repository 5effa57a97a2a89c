import { seededRandom } from '../../../core/statistics/random.ts'
import { type Series, seriesOf } from '../../../core/timeline/series.ts'
import { spansOf } from '../../../core/timeline/spans.ts'
import type { Thing, Timeline } from '../../../core/timeline/timeline.ts'
import { loadOn, START, timelineOf } from './timeline-of.ts'

const HOUR = 3_600_000

/** A load of a made-up log: what it adds while it runs, and how long its runs and pauses are on average. */
export interface MadeLoad {
  readonly ref: string
  readonly ma: number
  readonly onHours: number
  readonly offHours: number
}

export interface MadeLog {
  readonly days: number
  readonly intervalMs: number
  readonly baseMa: number
  readonly noiseMa: number
  /** Standard deviation of a slow wander of the level (Ornstein–Uhlenbeck, three hours), mA. */
  readonly wanderMa: number
  readonly loads: readonly MadeLoad[]
}

/** A log whose truth is known: steps of loads on a base that wanders, with noise of single readings. */
export function switchedLog(made: MadeLog, seed: number): Timeline {
  const random = seededRandom(seed)
  const from = START
  const to = from + made.days * 24 * HOUR
  const things: Thing[] = made.loads.map((load) => {
    const on: [number, number][] = []
    let t = from + random.exponential(load.offHours) * HOUR
    while (t < to - HOUR) {
      const end = t + Math.max(0.05, random.exponential(load.onHours)) * HOUR
      on.push([Math.round(t), Math.min(to, Math.round(end))])
      t = end + Math.max(0.05, random.exponential(load.offHours)) * HOUR
    }
    return loadOn(load.ref, on, from, to)
  })
  return timelineOf({
    days: made.days,
    things,
    leakage: levels(made, things, from, to, random),
    logged: spansOf([[from, to]]),
  })
}

function levels(
  made: MadeLog,
  things: readonly Thing[],
  from: number,
  to: number,
  random: ReturnType<typeof seededRandom>,
): Series {
  const n = Math.floor((to - from) / made.intervalMs)
  const t = new Float64Array(n)
  const v = new Float64Array(n)
  const keep = Math.exp(-made.intervalMs / (3 * HOUR))
  const kick = made.wanderMa * Math.sqrt(1 - keep * keep)
  const next = things.map(() => 0)
  let wander = made.wanderMa === 0 ? 0 : random.normal(0, made.wanderMa)
  for (let i = 0; i < n; i++) {
    t[i] = from + i * made.intervalMs
    if (kick > 0) wander = keep * wander + random.normal(0, kick)
    let level = made.baseMa + wander + (made.noiseMa > 0 ? random.normal(0, made.noiseMa) : 0)
    things.forEach((thing, k) => {
      const { changes } = thing
      while (next[k]! < changes.length && changes[next[k]!]!.at <= t[i]!) next[k]!++
      if (next[k]! > 0 && changes[next[k]! - 1]!.on) level += made.loads[k]!.ma
    })
    v[i] = level
  }
  return seriesOf(t, v)
}
