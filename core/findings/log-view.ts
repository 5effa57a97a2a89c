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

/** How far a thing's runs lift the level. */
export interface Lift {
  /** What a run usually and in one of ten cases adds at its height, mA. */
  readonly usualMa: number
  readonly topMa: number
  /** The latter over the usual headroom: from about two thirds on such runs fire trips. */
  readonly reach: number
}

/** What the leakage log says that bears on every suspect; computed once. Nulls without a log. */
export interface LogView {
  /** Minute means of energised time. */
  readonly minutes: Series | null
  readonly tripMa: number
  /** Median standing leakage over the trip current. */
  readonly usualShare: number | null
  /** By thing: what its runs do to the level; only where the log could see it. */
  readonly lifts: ReadonlyMap<string, Lift>
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

/** What is usually left below the trip current, mA; where the usual level stands at or above it, a tenth of it. */
function roomOf({ tripMa, standingMa }: Headroom): number {
  return Math.max(tripMa.value - (standingMa?.p50 ?? 0), 0.1 * tripMa.value)
}

/** Reads the log once for the line-up. Linear in readings. */
export function logView(
  timeline: Timeline,
  budget: readonly BudgetLine[],
  profiles: ReadonlyMap<string, RunProfile>,
  headroom: Headroom,
): LogView {
  const tripMa = headroom.tripMa.value
  const room = roomOf(headroom)
  const lifts = new Map<string, Lift>()
  for (const { of, kind } of timeline.things) {
    if (kind !== 'load') continue
    const profile = profiles.get(of)
    const line = budget.find((b) => b.of === of)
    const sure = line?.basis === 'switching' && (line.low ?? 0) > 0 ? (line.ma ?? 0) : 0
    if ((profile === undefined || profile.riseMa === null) && sure === 0) continue
    const usualMa = profile?.riseMa ?? sure
    // of one or two runs the tenth largest is no figure: the usual one stands for it
    const top = profile !== undefined && profile.runs >= LEAST_RUNS ? profile.buckets : []
    const topMa = top.reduce((most, bucket) => Math.max(most, bucket.p90Ma), Math.max(usualMa, sure))
    lifts.set(of, { usualMa, topMa, reach: topMa / room })
  }
  if (timeline.leakage === null || timeline.leakage.t.length < 100) {
    return {
      minutes: null,
      tripMa,
      usualShare: null,
      lifts,
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
    const seen = lifts.get(found.follows)
    const topMa = Math.max(seen?.topMa ?? 0, found.heightMa)
    lifts.set(found.follows, { usualMa: seen?.usualMa ?? found.heightMa, topMa, reach: topMa / room })
  }
  return {
    minutes,
    tripMa,
    usualShare: minutes.t.length === 0 ? null : quantile(thinned(minutes.v, 5_000), 0.5) / tripMa,
    lifts,
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
