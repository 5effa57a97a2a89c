import { binomialUpperTail } from '../../statistics/binomial.ts'
import { quantile } from '../../statistics/quantile.ts'
import { lowerBound, type Series } from '../../timeline/series.ts'
import { contains, intersect, measureWithin, type Spans, spansOf, totalMs } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { clockSchedule, sunSchedule } from './daily-schedule.ts'
import { dueSpans } from './due-spans.ts'
import { LEAST_STARTS } from './gathering.ts'
import { periodSchedule } from './period-schedule.ts'
import { type RaisedRun, raisedRuns, sizeOf } from './raised-runs.ts'
import { type Kept, type RunClock, runClock } from './run-clock.ts'
import type { ClockSchedule, SunSchedule, TimedSchedule } from './schedule.ts'

const MINUTE_MS = 60_000
/** Chance of the same among steps at random times, after paying for all that was tried. */
const LEAST_P = 1e-4
const MOST_CLUSTERS = 8
/** More runs than this say no more; the highest are kept. */
const MOST_RUNS = 2_500
/** Groups tried: runs alike in height within these factors, each group reaching into the next … */
const HEIGHT_STEP = 1.22
const HEIGHT_WIDTHS = [HEIGHT_STEP ** 2, HEIGHT_STEP ** 5] as const
/** … and in length within this one, or of any length. */
const LENGTH_WIDTH = 2
const LENGTH_STEP = Math.SQRT2
/** Runs on the schedule whose height is within this factor of the group's median are the same load's. */
const SAME_HEIGHT = 1.7
/** Clusters of one load that runs at several times a day differ by less than these factors. */
const ALIKE_HEIGHT = 1.4
const ALIKE_LENGTH = 1.25
const MOST_TIMES = 6
/** Steps this near a named thing's switching may be its own; … */
const SWITCHING_MS = 2 * MINUTE_MS
/** … they are when so large a share of them is and chance would hardly do it. */
const MOSTLY_ITS = 0.5
const ITS_P = 1e-3
/** The sun explains as well as the clock when its likelihood is within this factor. */
const AS_GOOD = 100
/** Two schedules hold as many runs when one holds at least this share of the other's. */
const AS_MANY = 0.8

/** A load that nobody named and that keeps a schedule. */
export interface TimedCluster {
  /** Median rise, mA, and the middle half of the rises. */
  readonly heightMa: number
  readonly heightLow: number
  readonly heightHigh: number
  /** Median length of a run, minutes. */
  readonly minutes: number
  readonly count: number
  /** When it was seen to run; the last minutes before a trip included. */
  readonly spans: Spans
  /** When it was due by its schedule, over the whole span, seen or not; within energised time. */
  readonly due: Spans
  readonly schedule: TimedSchedule
}

/**
 * Loads that nobody named and that run by a time switch, a timer or the sun, found in what the leakage has left after
 * the named things (`remainder`: minute means, mA). Runs of a raised level (`raisedRuns`) are taken in groups alike in height and
 * length; the group whose starts keep a schedule best is one load, it is set aside, and the rest is searched again, so that several
 * timers come apart and loads used at random do no harm. Every schedule is paid for by all that was tried; what keeps none, and what
 * follows a named thing's switching, is not reported. Highest first. Empty for an empty remainder. About linear in minutes.
 */
export function timedClusters(timeline: Timeline, remainder: Series): TimedCluster[] {
  const raised = raisedRuns(remainder)
  if (raised.runs.length < LEAST_STARTS) return []
  const clock = runClock(timeline, raised)
  let left = highest(raised.runs)
  const found: Kept<TimedSchedule>[] = []
  // groups of the same runs, in one round or the next, are asked once
  const known = new Map<string, Kept<TimedSchedule> | null>()
  for (let round = 0; round < MOST_CLUSTERS; round++) {
    const groups = groupsOf(left)
    let best: Kept<TimedSchedule> | null = null
    for (const runs of groups.values()) {
      const key = `${runs.length} ${runs[0]!.from} ${runs.at(-1)!.from} ${runs.reduce((sum, { from }) => sum + from, 0)}`
      const before = known.get(key)
      const kept = before === undefined ? bestSchedule(runs, clock) : before
      known.set(key, kept)
      if (kept !== null && isBetter(kept.schedule, best?.schedule)) best = kept
    }
    if (best === null || best.schedule.p * groups.size > LEAST_P) break
    const { ma } = sizeOf(best.members)
    const members = new Set(sameLoad(best, left, ma))
    if (!followsNamed(timeline, [...members])) {
      found.push({
        schedule: { ...best.schedule, p: Math.min(1, best.schedule.p * groups.size) },
        members: [...members],
      })
    }
    const gone = new Set([...members, ...best.members])
    left = left.filter((run) => !gone.has(run))
  }
  return joined(found)
    .map((kept) => clusterOf(kept, clock))
    .sort((a, b) => b.heightMa - a.heightMa)
}

function highest(runs: readonly RaisedRun[]): readonly RaisedRun[] {
  if (runs.length <= MOST_RUNS) return runs
  const cut = [...runs].sort((a, b) => b.ma - a.ma)[MOST_RUNS]!.ma
  return runs.filter(({ ma }) => ma > cut)
}

/** Runs alike in height and in length, by a name of the pair of windows; only those large enough to show a schedule. */
function groupsOf(runs: readonly RaisedRun[]): Map<string, RaisedRun[]> {
  const groups = new Map<string, RaisedRun[]>()
  const add = (key: string, run: RaisedRun): void => {
    const group = groups.get(key)
    if (group === undefined) groups.set(key, [run])
    else group.push(run)
  }
  for (const run of runs) {
    const minutes = (run.to - run.from) / MINUTE_MS
    for (const [w, width] of HEIGHT_WIDTHS.entries()) {
      for (const height of windowsOf(run.ma, width, HEIGHT_STEP)) {
        add(`${w} ${height}`, run)
        // a run cut short belongs to its length at least; taking it for that length only loses few
        for (const length of windowsOf(minutes, LENGTH_WIDTH, LENGTH_STEP)) add(`${w} ${height}/${length}`, run)
      }
    }
  }
  for (const [key, group] of groups) if (group.length < LEAST_STARTS) groups.delete(key)
  return groups
}

/** Numbers of the windows [step^k, step^k · width) that hold x. */
function windowsOf(x: number, width: number, step: number): number[] {
  const last = Math.floor(Math.log(x) / Math.log(step) + 1e-9)
  const first = last - Math.round(Math.log(width) / Math.log(step)) + 1
  return Array.from({ length: last - first + 1 }, (_, i) => first + i)
}

function bestSchedule(runs: readonly RaisedRun[], clock: RunClock): Kept<TimedSchedule> | null {
  const byClock = clockSchedule(runs, clock)
  const bySun = sunSchedule(runs, clock)
  const best: Kept<TimedSchedule> | null =
    byClock === null || bySun === null ? (byClock ?? bySun) : clockOrSun(byClock, bySun, clock)
  const byPeriod = periodSchedule(runs, clock)
  return byPeriod !== null && isBetter(byPeriod.schedule, best?.schedule) ? byPeriod : best
}

/** The smaller chance; of two beyond counting, the one kept more closely. */
function isBetter(a: TimedSchedule, b: TimedSchedule | undefined): boolean {
  if (b === undefined) return true
  return a.p === b.p ? a.spreadMinutes < b.spreadMinutes : a.p < b.p
}

/**
 * Clock or sun. By the likelihood of the same starts about each (n ln of the ratio of their spreads) where both hold as many; where one holds
 * far fewer, by the chance of either; with too little between them the clock, and the doubt is kept.
 */
function clockOrSun(byClock: Kept<ClockSchedule>, bySun: Kept<SunSchedule>, clock: RunClock): Kept<TimedSchedule> {
  const [one, other] = [byClock.members.length, bySun.members.length]
  const favour =
    Math.min(one, other) >= AS_MANY * Math.max(one, other)
      ? Math.min(one, other) * Math.log(bySun.schedule.spreadMinutes / byClock.schedule.spreadMinutes)
      : Math.log((bySun.schedule.p + Number.MIN_VALUE) / (byClock.schedule.p + Number.MIN_VALUE))
  if (Math.abs(favour) < Math.log(AS_GOOD)) return withSun(byClock, bySun.schedule.event, clock)
  return favour > 0 ? byClock : bySun
}

function withSun(
  { schedule, members }: Kept<ClockSchedule>,
  event: 'sunset' | 'sunrise',
  clock: RunClock,
): Kept<ClockSchedule> {
  const times = clock.sun![event]
  const minutes = [members[0]!, members.at(-1)!].map(({ from }) => {
    const at = times[Math.min(times.length - 1, lowerBound(times, from - 12 * 60 * MINUTE_MS))]!
    return clock.wall.minuteOfDay(at)
  })
  return { schedule: { ...schedule, sunMoved: Math.abs(minutes[1]! - minutes[0]!) }, members }
}

/** All runs on the schedule of a group that are about as high: those cut short by a trip, or of another length, too. */
function sameLoad(best: Kept<TimedSchedule>, runs: readonly RaisedRun[], ma: number): readonly RaisedRun[] {
  const near = runs.filter((run) => run.ma < ma * SAME_HEIGHT && run.ma * SAME_HEIGHT > ma)
  const own = new Set(best.members)
  const times = best.members.map(({ from }) => from)
  const { minutes } = sizeOf(best.members)
  return near.filter((run) => own.has(run) || (run.cut && times.some((t) => Math.abs(t - run.from) < minutes)))
}

/** Whether most of the starts come with one named thing's switching, far more than chance would bring. */
function followsNamed(timeline: Timeline, runs: readonly RaisedRun[]): boolean {
  const all = totalMs(timeline.energised)
  return timeline.things.some(({ changes }) => {
    const near = spansOf(changes.map(({ at }) => [at - SWITCHING_MS, at + SWITCHING_MS] as const))
    const hits = runs.filter(({ from }) => contains(near, from)).length
    if (hits < MOSTLY_ITS * runs.length) return false
    const chance = Math.min(1, measureWithin(near, timeline.from, timeline.to) / Math.max(1, all))
    return binomialUpperTail(hits, runs.length, chance, 1 - chance) <= ITS_P
  })
}

/** One load that runs at several clock times a day is one cluster. */
function joined(found: readonly Kept<TimedSchedule>[]): Kept<TimedSchedule>[] {
  const out: Kept<TimedSchedule>[] = []
  for (const kept of found) {
    const at = out.findIndex((other) => isSameLoad(other, kept))
    const other = out[at]
    if (other?.schedule.kind !== 'clock' || kept.schedule.kind !== 'clock') {
      out.push(kept)
      continue
    }
    const { sunMoved: _, ...schedule } = other.schedule
    out[at] = {
      schedule: {
        ...schedule,
        minutes: [...schedule.minutes, ...kept.schedule.minutes].sort((a, b) => a - b),
        spreadMinutes: Math.max(schedule.spreadMinutes, kept.schedule.spreadMinutes),
        kept: Math.min(schedule.kept, kept.schedule.kept),
        p: Math.max(schedule.p, kept.schedule.p),
      },
      members: [...other.members, ...kept.members].sort((a, b) => a.from - b.from),
    }
  }
  return out
}

function isSameLoad(a: Kept<TimedSchedule>, b: Kept<TimedSchedule>): boolean {
  if (a.schedule.kind !== 'clock' || b.schedule.kind !== 'clock') return false
  if (a.schedule.minutes.length >= MOST_TIMES || a.schedule.days.join() !== b.schedule.days.join()) return false
  const [one, two] = [sizeOf(a.members), sizeOf(b.members)]
  return (
    Math.abs(Math.log(one.ma / two.ma)) < Math.log(ALIKE_HEIGHT) &&
    Math.abs(Math.log(one.minutes / two.minutes)) < Math.log(ALIKE_LENGTH)
  )
}

function clusterOf({ schedule, members }: Kept<TimedSchedule>, clock: RunClock): TimedCluster {
  const heights = members.map(({ ma }) => ma)
  const { ma, minutes } = sizeOf(members)
  return {
    heightMa: ma,
    heightLow: quantile(heights, 0.25),
    heightHigh: quantile(heights, 0.75),
    minutes,
    count: members.length,
    spans: spansOf(members.map(({ from, to }) => [from, to] as const)),
    due: intersect(dueSpans(schedule, minutes, clock), clock.timeline.energised),
    schedule,
  }
}
