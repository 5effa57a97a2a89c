import { quantile } from '../../statistics/quantile.ts'
import { lowerBound } from '../../timeline/series.ts'
import type { RaisedRun } from './raised-runs.ts'
import type { RunClock } from './run-clock.ts'

const MINUTE_MS = 60_000

/** How runs keep to the instants at which they were due. */
export interface DueStarts {
  readonly members: readonly RaisedRun[]
  /** Due instants that the log could have seen, from the first member to the last. */
  readonly due: readonly number[]
  /** For each of them whether a run began there. */
  readonly came: readonly boolean[]
  /** Median of start less due instant, minutes. */
  readonly offsetMinutes: number
  /** Nine of ten starts lie within so many minutes of the due instant and that offset; no closer than the log is fine, at least one. */
  readonly spreadMinutes: number
}

/** Compares runs with due instants (ascending); a run belongs to one within `toleranceMs`. */
export function dueStarts(
  runs: readonly RaisedRun[],
  due: ArrayLike<number>,
  toleranceMs: number,
  clock: RunClock,
): DueStarts | null {
  const dues = Float64Array.from(due)
  const members: RaisedRun[] = []
  const off: number[] = []
  const hit = new Set<number>()
  for (const run of runs) {
    const i = lowerBound(dues, run.from - toleranceMs)
    if (i >= dues.length || dues[i]! > run.from + toleranceMs || hit.has(i)) continue
    hit.add(i)
    members.push(run)
    off.push((run.from - dues[i]!) / MINUTE_MS)
  }
  if (members.length === 0) return null
  const offsetMinutes = quantile(off, 0.5)
  const [first, last] = [Math.min(...hit), Math.max(...hit)]
  const seen: number[] = []
  const came: boolean[] = []
  for (let i = first; i <= last; i++) {
    if (!hit.has(i) && !clock.isWatched(dues[i]! + offsetMinutes * MINUTE_MS)) continue
    seen.push(dues[i]!)
    came.push(hit.has(i))
  }
  const away = quantile(
    off.map((m) => Math.abs(m - offsetMinutes)),
    0.9,
  )
  return { members, due: seen, came, offsetMinutes, spreadMinutes: Math.max(1, clock.stepMs / (2 * MINUTE_MS), away) }
}
