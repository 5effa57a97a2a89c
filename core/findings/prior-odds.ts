import type { Headroom } from '../contract/findings.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import type { Lift, LogView } from './log-view.ts'
import { OUTSIZED_MA } from './run-profiles.ts'
import type { TimedCluster } from './timed/timed-clusters.ts'
import { bestDrying } from './wet-lift.ts'
import { heldAbove } from './windows/held.ts'
import { HOUR_MS } from './windows/trip-share.ts'
import type { Drying } from './windows/weather-windows.ts'

/** Prior odds of being a cause, before anything was read: judgement from the mechanisms of domain.md, no source. */
export const ODDS = {
  load: 0.08,
  circuit: 0.05,
  rain: 0.1,
  temperature: 0.02,
  clock: 0.06,
  period: 0.04,
  sun: 0.06,
  'load-current': 0.05,
  standing: 0.08,
  device: 0.03,
  supply: 0.12,
  unlisted: 0.06,
} as const

/** A circuit whose sheet lists no load may still feed one. */
const LOADS_ASSUMED = 1

/**
 * Excursions higher than this are no sound appliance's: 1.5 times what IEC 60335-1 clause 13.2 allows a stationary one of
 * class I (3.5 mA; from memory).
 */
const ABNORMAL_MA = 5.25
const ABNORMAL_SHARE = 0.2
/** How much likelier a cause an unlisted thing is that was seen to leak so much. */
export const ABNORMAL = 12

/**
 * How much likelier a cause it makes a thing that its runs use up so much of the usual headroom, usually and in one of ten
 * cases, by more than a sound appliance leaks. A fault that never shows in the log, because it lasts seconds or fires
 * at once every time, keeps the rest from falling further. Judgement, tuned on simulated sites.
 */
const REACH: readonly { readonly usual: number; readonly top: number; readonly factor: number }[] = [
  { usual: 0.33, top: 0.33, factor: 80 },
  { usual: 0.18, top: 0.4, factor: 30 },
  { usual: 0.15, top: 0.25, factor: 1.5 },
  { usual: 0.05, top: 0.15, factor: 0.6 },
]
const NO_REACH = 0.35
/** From this factor on a thing is suspicious by its leakage alone. */
export const GUILTY_LOOK = 20

/** Usual level this near the trip current: many together. */
export const NEAR = 0.75

/**
 * Odds of a circuit or load. A circuit stands in for those of its loads that nothing can be said about. The log then
 * weighs in: runs that lift the level far towards the trip current make a likelier cause than runs without a trace.
 * Mildly, for a fault may show only at the trips themselves.
 */
export function thingOdds(timeline: Timeline, thing: Thing, log: LogView, isJudged: (of: string) => boolean): number {
  let odds: number = ODDS[thing.kind]
  if (thing.kind === 'circuit') {
    const loads = timeline.things.filter((t) => t.kind === 'load' && t.circuit === thing.ref)
    const silent = loads.length === 0 ? LOADS_ASSUMED : loads.filter((t) => !isJudged(t.of)).length
    odds += silent * ODDS.load
  }
  const lift = log.lifts.get(thing.of)
  // where the usual level is near the trip current anyway, what a sound appliance leaks is the last step, not the cause
  const near = log.usualShare !== null && log.usualShare >= NEAR
  const small = near && lift !== undefined && lift.topMa < OUTSIZED_MA && lift.outsizedRuns === 0 ? 0.02 : 1
  return odds * liftFactor(lift) * small * (log.followsCurrent === true ? 0.002 : 1)
}

/** How much likelier a cause what its runs do to the level makes a thing; 1 where nothing is known. */
export function liftFactor(lift: Lift | undefined): number {
  if (lift === undefined) return 1
  const found = REACH.find(({ usual, top }) => lift.usual >= usual && lift.top >= top)
  // a few runs that leaked far more than a sound thing does are no proof of innocence
  const least = lift.outsizedRuns > 0 ? 1 : NO_REACH
  const factor = Math.max(least, found?.factor ?? NO_REACH)
  return lift.topMa < OUTSIZED_MA ? Math.min(1, factor) : factor
}

/** The same for a load that nobody named and that keeps a schedule: its height is that of every run. */
export function timedFactor(log: LogView, { heightMa }: TimedCluster): number {
  const reach = heightMa / log.roomMa
  return liftFactor({ usualMa: heightMa, topMa: heightMa, usual: reach, top: 1.2 * reach, outsizedRuns: 0 })
}

/** Whether the excursions that no named load accounts for are higher than any sound appliance leaks. */
export function isAbnormal(log: LogView): boolean {
  const { unexplained, tripMa } = log
  return unexplained !== null && unexplained.heightMa >= Math.max(ABNORMAL_MA, ABNORMAL_SHARE * tripMa)
}

/** How far the odds of a listed thing without a large lift fall where an unlisted one leaks heavily. */
export function innocence(log: LogView, of: string): number {
  const accused = isAbnormal(log) || log.timed.some((cluster) => timedFactor(log, cluster) >= GUILTY_LOOK)
  return accused && liftFactor(log.lifts.get(of)) < GUILTY_LOOK ? 0.3 : 1
}

/** Many together: likely only where the usual level stands near the trip current. */
export function standingOdds(log: LogView, headroom: Headroom): number {
  const share = log.usualShare
  if (share === null || log.followsCurrent === true) return 0
  const sure = headroom.tripMa.basis === 'limits' ? 0.5 : 1
  const factor = share >= 0.8 ? 5 : share >= 0.7 ? 2 : share >= 0.6 ? 0.4 : 0
  return ODDS.standing * factor ** sure
}

/** Rain: likelier when the log rises with it, unlikelier when the log is there and does not. */
export function rainOdds({ wetLift, tripMa }: LogView): number {
  if (wetLift === null) return ODDS.rain
  const share = wetLift.ma / tripMa
  return ODDS.rain * (share >= 0.12 ? 5 : share >= 0.05 ? 1.5 : 0.08)
}

/** Wet time by the drying law that fits best, above a tenth of its peak; null where the leakage does not rise with rain. */
export function wetTime(rain: number, laws: readonly Drying[]): Float64Array | null {
  if (rain <= 2 * ODDS.rain || laws.length === 0) return null
  const { wetness, lag } = bestDrying(laws)
  const peak = wetness.v.reduce((a, b) => Math.max(a, b), 0)
  return heldAbove(wetness, 0.1 * peak, true, lag * HOUR_MS).inside
}

/** Neutral–earth: decided mostly by whether leakage follows the load current whoever carries it. */
export function loadCurrentOdds(log: LogView): number {
  return ODDS['load-current'] * (log.followsCurrent === true ? 15 : log.followsCurrent === false ? 0.02 : 1)
}
