import type { BudgetLine } from '../contract/findings.ts'
import { quantile } from '../statistics/quantile.ts'
import { type State, stateAt } from '../timeline/exposure.ts'
import { usualInterval } from '../timeline/series.ts'
import { type Spans, spanAt, spansOf } from '../timeline/spans.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import { levelBetween } from './levels.ts'

const MINUTE_MS = 60_000
/** Minutes since switching on at which the buckets of a profile begin and end. */
export const PROFILE_MINUTES: readonly (readonly [number, number])[] = [
  [0, 1],
  [1, 3],
  [3, 10],
  [10, 30],
  [30, 120],
]
/** The level before a start is that of so many minutes at most. */
const BEFORE_MS = 10 * MINUTE_MS
/** A run that lifts the level by more is no sound appliance's: 3.5 mA of IEC 60335-1 clause 13.2 (from memory), and some room. */
export const OUTSIZED_MA = 4
/** The runs that are looked at, the latest ones. */
const MOST_RUNS = 400

/** Extra leakage in one stretch of the minutes since switching on, over all runs, mA. */
export interface ProfileBucket {
  readonly fromMinutes: number
  readonly toMinutes: number
  readonly runs: number
  /** Median over the runs, and the tenth and ninetieth percentile. */
  readonly medianMa: number
  readonly p10Ma: number
  readonly p90Ma: number
}

/** How leakage goes with a thing's runs. */
export interface RunProfile {
  readonly of: string
  /** Starts seen in the log. */
  readonly runs: number
  readonly buckets: readonly ProfileBucket[]
  /** Largest of the buckets' medians: the rise that its runs usually reach, mA; null without a run in the log. */
  readonly riseMa: number | null
  /** Largest rise of a single run's bucket, mA: what it can do on a bad day. */
  readonly largestMa: number | null
  /** Its runs that lifted the level by more than `OUTSIZED_MA`. */
  readonly outsized: Spans
  /** Minutes since switching on at which the usual rise is largest (middle of the bucket). */
  readonly peakMinutes: number | null
}

/**
 * Superposed epochs of every thing (Chree 1913): the level in the minutes after each start over that just before, less the
 * steps of other things as the budget knows them; robust over the runs. A gap, a trip or the end of the run ends what is
 * seen of it. By reference. O(runs × (401 + things)).
 */
export function runProfiles(timeline: Timeline, lines: readonly BudgetLine[] = []): Map<string, RunProfile> {
  const profiles = new Map<string, RunProfile>()
  const steps = timeline.things.map((thing) => lines.find((l) => l.of === thing.of && l.basis !== 'unjudged')?.ma ?? 0)
  timeline.things.forEach((thing, index) => {
    profiles.set(thing.of, profileOf(timeline, thing, index, steps))
  })
  return profiles
}

function profileOf(timeline: Timeline, thing: Thing, index: number, steps: readonly number[]): RunProfile {
  const rises: number[][] = PROFILE_MINUTES.map(() => [])
  let runs = 0
  const outsized: [number, number][] = []
  const starts = timeline.leakage === null ? [] : thing.changes.filter((change) => change.on).slice(-MOST_RUNS)
  for (const { at } of starts) {
    const seen = runOf(timeline, thing, index, at, steps)
    if (seen === null) continue
    runs++
    const run = spanAt(thing.state.on, at)
    if (run !== undefined && seen.some((rise) => rise > OUTSIZED_MA)) outsized.push([at, run.to])
    seen.forEach((rise, b) => {
      if (!Number.isNaN(rise)) rises[b]!.push(rise)
    })
  }
  const buckets: ProfileBucket[] = []
  let largestMa: number | null = null
  rises.forEach((values, b) => {
    const [fromMinutes, toMinutes] = PROFILE_MINUTES[b]!
    if (values.length === 0) return
    largestMa = Math.max(largestMa ?? Number.NEGATIVE_INFINITY, ...values)
    buckets.push({
      fromMinutes,
      toMinutes,
      runs: values.length,
      medianMa: quantile(values, 0.5),
      p10Ma: quantile(values, 0.1),
      p90Ma: quantile(values, 0.9),
    })
  })
  const top = buckets.reduce<ProfileBucket | null>(
    (best, b) => (best === null || b.medianMa > best.medianMa ? b : best),
    null,
  )
  return {
    of: thing.of,
    runs,
    buckets,
    riseMa: top?.medianMa ?? null,
    largestMa,
    outsized: spansOf(outsized),
    peakMinutes: top === null ? null : (top.fromMinutes + top.toMinutes) / 2,
  }
}

/** Rises of one run by bucket, NaN where the run or the log is over; null when the start itself is not logged. */
function runOf(timeline: Timeline, thing: Thing, index: number, at: number, steps: readonly number[]): number[] | null {
  const leakage = timeline.leakage!
  const stretch = spanAt(timeline.logged, at)
  const run = spanAt(thing.state.on, at)
  if (stretch === undefined || run === undefined || at - stretch.from < MINUTE_MS) return null
  const interval = usualInterval(leakage)
  const beforeFrom = Math.max(stretch.from, at - Math.max(BEFORE_MS, 3 * interval))
  const before = levelBetween(leakage, beforeFrom, at - interval / 2)
  if (Number.isNaN(before)) return null
  const earlier = (beforeFrom + at) / 2
  const were = timeline.things.map((other, k): State => {
    const isMute = k === index || steps[k] === 0 || other.changes.length === 0
    return isMute ? 'unknown' : stateAt(other.state, earlier)
  })
  return PROFILE_MINUTES.map(([from, to]) => {
    // Readings of the first seconds may still be those of the state before.
    const a = at + Math.max(from * MINUTE_MS, Math.min(2 * interval, 20_000))
    const b = Math.min(at + to * MINUTE_MS, run.to, stretch.to)
    const level = b > a ? levelBetween(leakage, a, b) : Number.NaN
    return Number.isNaN(level) ? level : level - before - othersSince(timeline, were, (a + b) / 2, steps)
  })
}

/**
 * What the other things have added since, mA, by the budget; unknown is who is not asked. Circuits and their loads are never
 * counted twice.
 */
function othersSince(timeline: Timeline, were: readonly State[], later: number, steps: readonly number[]): number {
  let sum = 0
  timeline.things.forEach((other, k) => {
    const was = were[k]!
    if (was === 'unknown') return
    const is = stateAt(other.state, later)
    if (is === 'unknown' || was === is) return
    sum += is === 'on' ? steps[k]! : -steps[k]!
  })
  return sum
}
