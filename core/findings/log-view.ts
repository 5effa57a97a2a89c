import type { BudgetLine, Headroom } from '../contract/findings.ts'
import { quantile } from '../statistics/quantile.ts'
import type { Series } from '../timeline/series.ts'
import { joinSeries, sliceSeries } from '../timeline/series.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { followsCurrent } from './follows-current.ts'
import { minuteLevels } from './minute-levels.ts'
import type { RunProfile } from './run-profiles.ts'
import { type TimedCluster, timedClusters } from './timed/timed-clusters.ts'
import { type Schedule, scheduleOf } from './timed-steps.ts'
import { type Unexplained, unexplained } from './unexplained.ts'
import { thinned } from './windows/held.ts'

/** What the leakage log says that bears on every suspect; computed once. Nulls without a log. */
export interface LogView {
  /** Minute means of energised time. */
  readonly minutes: Series | null
  readonly tripMa: number
  /** Median standing leakage over the trip current. */
  readonly usualShare: number | null
  /** By thing: how far its runs lift the level, over the trip current; only where the log could see it. */
  readonly liftShare: ReadonlyMap<string, number>
  readonly unexplained: Unexplained | null
  /** When the excursions that no named load accounts for come. */
  readonly schedule: Schedule
  /** Loads that nobody named and that keep a schedule, highest first; empty without a log. */
  readonly timed: readonly TimedCluster[]
  /** Whether leakage follows the group's load current whichever load carries it. */
  readonly followsCurrent: boolean | null
}

/** Runs or switchings that a lift must rest on. */
const LEAST_RUNS = 3

/** A figure of the budget whose interval does not hold zero. */
function isSure(line: BudgetLine): boolean {
  return line.basis === 'switching' && line.low !== null && line.low > 0
}

/** Reads the log once for the line-up. Linear in readings. */
export function logView(
  timeline: Timeline,
  budget: readonly BudgetLine[],
  profiles: ReadonlyMap<string, RunProfile>,
  headroom: Headroom,
): LogView {
  const tripMa = headroom.tripMa.value
  const liftShare = new Map<string, number>()
  for (const thing of timeline.things) {
    const profile = profiles.get(thing.of)
    const line = budget.find((b) => b.of === thing.of)
    const byRuns = profile !== undefined && profile.runs >= LEAST_RUNS ? profile.riseMa : null
    const bySwitching = line !== undefined && isSure(line) && line.switchings >= 2 ? line.ma : null
    if (byRuns !== null || bySwitching !== null) {
      liftShare.set(thing.of, Math.max(byRuns ?? 0, bySwitching ?? 0) / tripMa)
    }
  }
  if (timeline.leakage === null || timeline.leakage.t.length < 100) {
    return {
      minutes: null,
      tripMa,
      usualShare: null,
      liftShare,
      unexplained: null,
      schedule: { kind: 'none' },
      timed: [],
      followsCurrent: null,
    }
  }
  const minutes = energisedMinutes(timeline, timeline.leakage)
  const found = minutes.t.length < 60 ? null : unexplained(timeline, minutes, budget, tripMa)
  // what comes with one named thing alone is that thing's lift, though the budget's steps do not show it
  if (found !== null && found.follows !== null && found.apart >= LEAST_RUNS) {
    liftShare.set(found.follows, Math.max(liftShare.get(found.follows) ?? 0, found.heightMa / tripMa))
  }
  return {
    minutes,
    tripMa,
    usualShare: minutes.t.length === 0 ? null : quantile(thinned(minutes.v, 5_000), 0.5) / tripMa,
    liftShare,
    unexplained: found,
    schedule: found === null || found.follows !== null ? { kind: 'none' } : scheduleOf(timeline, found),
    timed: found === null ? [] : timedClusters(timeline, found.remainder),
    followsCurrent: followsCurrent(timeline, minutes, budget),
  }
}

function energisedMinutes(timeline: Timeline, leakage: Series): Series {
  const { energised } = timeline
  const parts: Series[] = []
  for (let i = 0; i < energised.length; i += 2)
    parts.push(minuteLevels(sliceSeries(leakage, energised[i]!, energised[i + 1]!)))
  return joinSeries(parts)
}
