import type { BudgetLine, Headroom } from '../contract/findings.ts'
import { median } from '../statistics/median.ts'
import { quantile } from '../statistics/quantile.ts'
import type { Series } from '../timeline/series.ts'
import { joinSeries, sliceSeries } from '../timeline/series.ts'
import { countSpans, NO_SPANS, type Spans, union } from '../timeline/spans.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { followsCurrent, type Together } from './follows-current.ts'
import { minuteLevels } from './minute-levels.ts'
import type { RunProfile } from './run-profiles.ts'
import { type TimedCluster, timedClusters } from './timed/timed-clusters.ts'
import { type Unexplained, unexplained } from './unexplained.ts'
import { type WetLift, wetLift } from './wet-lift.ts'
import { thinned } from './windows/held.ts'
import { type Drying, dryings } from './windows/weather-windows.ts'

/** How far a thing's runs lift the level. */
export interface Lift {
  /** What a run usually and in one of ten cases adds at its height, mA. */
  readonly usualMa: number
  readonly topMa: number
  /**
   * The same over the usual headroom, less what happens at the starts of most other things too (a leak that belongs to
   * none of them raises all): near one such runs fire trips.
   */
  readonly usual: number
  readonly top: number
  /** Runs in which it leaked more than a sound thing does. */
  readonly outsizedRuns: number
}

/** What the leakage log says that bears on every suspect; computed once. Nulls without a log. */
export interface LogView {
  /** Minute means of energised time. */
  readonly minutes: Series | null
  readonly tripMa: number
  /** Usual headroom, mA. */
  readonly roomMa: number
  /** Median standing leakage over the trip current. */
  readonly usualShare: number | null
  /** By thing: what its runs do to the level; only where the log could see it. */
  readonly lifts: ReadonlyMap<string, Lift>
  /** Time in which one load alone leaks more than a sound one. */
  readonly outsized: Spans
  readonly unexplained: Unexplained | null
  /** Loads that nobody named and that keep a schedule, highest first; empty without a log. */
  readonly timed: readonly TimedCluster[]
  /** Whether leakage follows the group's load current whichever load carries it; null where that cannot be told. */
  readonly followsCurrent: boolean | null
  /** How closely it does. */
  readonly withCurrent: Together | null
  /** Drying laws of rain, and how far the level rises by the one that fits best; null without rain or log. */
  readonly dryings: readonly Drying[]
  readonly wetLift: WetLift | null
}

/** Runs or switchings that a lift must rest on. */
const LEAST_RUNS = 3
/** Things that must be seen before what is common to most of them can be told. */
const LEAST_LIFTS = 4

function liftOf(usualMa: number, topMa: number, roomMa: number, outsizedRuns: number): Lift {
  return { usualMa, topMa, usual: usualMa / roomMa, top: topMa / roomMa, outsizedRuns }
}

/** The lifts with what is common to most of them taken off; as they are where there are too few to tell. */
function beyondCommon(lifts: ReadonlyMap<string, Lift>): Map<string, Lift> {
  if (lifts.size < LEAST_LIFTS) return new Map(lifts)
  const usual = median([...lifts.values()].map((lift) => lift.usual))
  const top = median([...lifts.values()].map((lift) => lift.top))
  return new Map(
    [...lifts].map(([of, lift]) => [
      of,
      { ...lift, usual: Math.max(0, lift.usual - usual), top: Math.max(0, lift.top - top) },
    ]),
  )
}

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
  const roomMa = roomOf(headroom)
  const lifts = new Map<string, Lift>()
  for (const { of, kind } of timeline.things) {
    if (kind !== 'load') continue
    const profile = profiles.get(of)
    const line = budget.find((b) => b.of === of)
    const sure = line?.basis === 'switching' && line.fallback !== true && (line.low ?? 0) > 0 ? (line.ma ?? 0) : 0
    if ((profile === undefined || profile.riseMa === null) && sure === 0) continue
    const usualMa = profile?.riseMa ?? sure
    // of one or two runs the tenth largest is no figure: the usual one stands for it
    const top = profile !== undefined && profile.runs >= LEAST_RUNS ? profile.buckets : []
    const topMa = top.reduce((most, bucket) => Math.max(most, bucket.p90Ma), Math.max(usualMa, sure))
    lifts.set(of, liftOf(usualMa, topMa, roomMa, countSpans(profile?.outsized ?? NO_SPANS)))
  }
  if (timeline.leakage === null || timeline.leakage.t.length < 100) {
    return {
      minutes: null,
      tripMa,
      roomMa,
      usualShare: null,
      lifts: beyondCommon(lifts),
      outsized: NO_SPANS,
      unexplained: null,
      timed: [],
      followsCurrent: null,
      withCurrent: null,
      dryings: dryings(timeline.rain, null),
      wetLift: null,
    }
  }
  const minutes = energisedMinutes(timeline, timeline.leakage)
  const found = minutes.t.length < 60 ? null : unexplained(timeline, minutes, budget, tripMa)
  // what comes with one named thing alone is that thing's lift, though the budget's steps do not show it
  if (found !== null && found.follows !== null && found.apart >= LEAST_RUNS) {
    const seen = lifts.get(found.follows)
    const topMa = Math.max(seen?.topMa ?? 0, found.heightMa)
    lifts.set(
      found.follows,
      liftOf(Math.max(seen?.usualMa ?? 0, found.heightMa), topMa, roomMa, seen?.outsizedRuns ?? 0),
    )
  }
  const usualMa = headroom.standingMa?.p50 ?? 0
  const together = followsCurrent(timeline, minutes, usualMa, tripMa)
  const laws = dryings(timeline.rain, found?.remainder ?? null)
  return {
    minutes,
    tripMa,
    roomMa,
    usualShare: minutes.t.length === 0 ? null : quantile(thinned(minutes.v, 5_000), 0.5) / tripMa,
    lifts: beyondCommon(lifts),
    outsized: outsizedOf(timeline, profiles),
    unexplained: found,
    timed: found === null ? [] : timedClusters(timeline, found.remainder),
    followsCurrent: together?.follows ?? null,
    withCurrent: together,
    dryings: laws,
    wetLift: found === null ? null : wetLift(timeline, found.remainder, laws),
  }
}

function outsizedOf(timeline: Timeline, profiles: ReadonlyMap<string, RunProfile>): Spans {
  const loads = timeline.things.filter((t) => t.kind === 'load').map((t) => profiles.get(t.of)?.outsized ?? NO_SPANS)
  return loads.reduce(union, NO_SPANS)
}

function energisedMinutes(timeline: Timeline, leakage: Series): Series {
  const { energised } = timeline
  const parts: Series[] = []
  for (let i = 0; i < energised.length; i += 2)
    parts.push(minuteLevels(sliceSeries(leakage, energised[i]!, energised[i + 1]!)))
  return joinSeries(parts)
}
