import { GAP_INTERVALS, lowerBound, type Series, usualInterval } from '../../timeline/series.ts'
import { spanAt } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import type { EpochAxis } from './epoch-axis.ts'

/** Readings below this share of the level before are the fall to nothing itself. */
const FALLEN = 0.1

/**
 * Mean leakage of every stretch before an instant, mA: of the readings in it, else of the last one before while it still speaks for the
 * time (three usual intervals). NaN where the log is silent or the device was open. Readings at the end that have already fallen to nothing
 * are the trip, not its course. Linear in the readings of the hour.
 */
export function courseBefore(timeline: Timeline, leakage: Series, at: number, axis: EpochAxis): Float64Array {
  const course = new Float64Array(axis.before.length).fill(Number.NaN)
  const closed = spanAt(timeline.energised, at - 1)
  if (closed === undefined) return course
  const hold = GAP_INTERVALS * (usualInterval(leakage) || 0)
  const { t, v } = leakage
  const first = lowerBound(t, Math.max(closed.from, at - axis.before[0]! - hold))
  const last = lastLive(v, first, lowerBound(t, at))
  let i = first
  axis.before.forEach((before, k) => {
    const from = at - before
    const to = at - (axis.before[k + 1] ?? 0)
    while (i < last && t[i]! < from) i++
    let sum = 0
    let n = 0
    while (i < last && t[i]! < to) {
      sum += v[i]!
      n++
      i++
    }
    if (n > 0) course[k] = sum / n
    else if (i > first && to - t[i - 1]! <= hold && from >= closed.from) course[k] = v[i - 1]!
  })
  return course
}

/** One past the last reading that is not yet part of the fall: at most two readings are taken back. */
function lastLive(v: Float64Array, first: number, end: number): number {
  let last = end
  while (last > first + 3 && end - last < 2 && v[last - 1]! < FALLEN * v[last - 4]!) last--
  return last
}
