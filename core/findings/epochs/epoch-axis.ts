import { usualInterval } from '../../timeline/series.ts'
import type { Timeline } from '../../timeline/timeline.ts'

const MINUTE_MS = 60_000
const HOUR_MINUTES = 60
/** The last minutes are looked at closely. */
const CLOSE_MINUTES = 5
const FINEST_MS = 5_000

/** Stretches of time before a trip, the earliest first; ms before it. Stretch i reaches from `before[i]` to `before[i + 1]`, the last one to 0. */
export interface EpochAxis {
  readonly before: Float64Array
  /** Middle of each stretch, minutes from the trip (negative). */
  readonly minutes: readonly number[]
}

/** The hour before a trip by minutes, its last five minutes as closely as the logger reads, at most every 5 s. At most 115 stretches. */
export function epochAxis(timeline: Timeline): EpochAxis {
  const interval = timeline.leakage === null ? MINUTE_MS : usualInterval(timeline.leakage)
  const step = Math.min(MINUTE_MS, Math.max(FINEST_MS, Number.isNaN(interval) ? MINUTE_MS : interval))
  const fine = Math.max(1, Math.round((CLOSE_MINUTES * MINUTE_MS) / step))
  const edges: number[] = []
  for (let minute = HOUR_MINUTES; minute > CLOSE_MINUTES; minute--) edges.push(minute * MINUTE_MS)
  for (let k = fine; k > 0; k--) edges.push((k * CLOSE_MINUTES * MINUTE_MS) / fine)
  const before = Float64Array.from(edges)
  const minutes = edges.map((edge, i) => -(edge + (edges[i + 1] ?? 0)) / 2 / MINUTE_MS)
  return { before, minutes: minutes.map((m) => Number(m.toFixed(3))) }
}
