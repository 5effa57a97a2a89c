import type { BudgetLine, Headroom, TripFinding } from '../contract/findings.ts'
import { usualInterval } from '../timeline/series.ts'
import { eachSpan, NO_SPANS, spansOf } from '../timeline/spans.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import type { Candidate, ExposureWindow } from './line-up.ts'
import type { LogView } from './log-view.ts'
import { type CauseKind, courseRatio, type Pace } from './marks.ts'
import {
  ABNORMAL,
  GUILTY_LOOK,
  innocence,
  isAbnormal,
  liftFactor,
  loadCurrentOdds,
  ODDS,
  rainOdds,
  standingOdds,
  thingOdds,
  timedFactor,
  wetTime,
} from './prior-odds.ts'
import type { RunProfile } from './run-profiles.ts'
import type { TimedCluster } from './timed/timed-clusters.ts'
import { whenWords } from './timed/timed-step.ts'
import { clockWindows } from './windows/clock-windows.ts'
import { heldToTrips } from './windows/held-to-trips.ts'
import { withKicks } from './windows/kicks.ts'
import { levelWindows, ofOneThing } from './windows/level-windows.ts'
import { periodWindows } from './windows/period-windows.ts'
import { sunWindows } from './windows/sun-windows.ts'
import { type Partner, thingWindows } from './windows/thing-windows.ts'
import { type Frame, type Layer, layeredWindow, marked, normalised, windowOf } from './windows/trip-share.ts'
import { loadCurrentWindows, rainWindows, temperatureWindows } from './windows/weather-windows.ts'

/** A device that opens too soon is fired by any sound load: how far the odds of all else fall then. */
const UNDER_A_BAD_DEVICE = 0.001
/** Odds of a device that a test showed to open too soon: measured, not guessed. */
const BAD_DEVICE = 600

/** Trips after a visible rise that speak for a device that opens too soon. */
const LEAST_RISEN = 3
/** What takes up headroom worth naming, mA. */
const PARTNER_MA = 0.8

/** A load that runs by itself mostly fires as it starts: in its first minutes, so many times likelier. */
const EARLY_MS = 6 * 60_000
const EARLY_TIMES = 10

/** Something on no sheet that comes by the clock, a period or the sun is one and the same thing. */
const TIMERS: ReadonlySet<string> = new Set(['clock', 'period', 'sun'])

/** Times of people and loggers differ by this much. */
const TOGETHER_MS = 60_000

/** What the other findings say that the line-up uses. */
export interface Measured {
  readonly trips: readonly TripFinding[]
  readonly profiles: ReadonlyMap<string, RunProfile>
  readonly budget: readonly BudgetLine[]
  readonly headroom: Headroom
}

/**
 * Every suspect that this site can have, with its prior odds and the windows in which it may act: circuits and loads,
 * rain, temperature, clock, period, sun, load current, standing leakage or the device itself, supply, and a load that
 * nobody listed. `courses` are those of the frame's trips. A suspect without a window is left out: nothing can be said.
 */
export function candidatesOf(
  frame: Frame,
  courses: readonly TripFinding['course'][],
  measured: Measured,
  log: LogView,
): Candidate[] {
  const { timeline } = frame
  const interval = timeline.leakage === null ? 1 : usualInterval(timeline.leakage)
  const marks = (kind: CauseKind, pace: Pace): Float64Array =>
    Float64Array.from(courses, (course) => courseRatio(kind, pace, course, Number.isNaN(interval) ? 1 : interval))
  const list: Candidate[] = []
  const tooSensitive = isTooSensitive(timeline, measured)
  const add = (of: string, given: number, kind: CauseKind, windows: readonly ExposureWindow[]): void => {
    const odds = tooSensitive && of !== 'device' && of !== 'supply' ? given * UNDER_A_BAD_DEVICE : given
    if (windows.length === 0 || odds <= 0) return
    // supply has one pace; every other cause is tried at both
    const paced =
      kind === 'supply'
        ? marked(windows, marks(kind, 'at-once'), 1)
        : [...marked(windows, marks(kind, 'at-once'), 0.5), ...marked(windows, marks(kind, 'visibly'), 0.5)]
    const thing = timeline.things.find((t) => t.of === of)
    const candidate: Candidate = { of, odds, windows: paced }
    if (of === 'device' || of === 'unlisted') list.push({ ...candidate, alone: true })
    else if (TIMERS.has(of)) list.push({ ...candidate, family: 'timer', ownHours: true })
    else if (of === 'load-current' && log.followsCurrent === true) list.push({ ...candidate, alone: true })
    else if (thing?.kind === 'load') list.push({ ...candidate, partOf: `circuit:${thing.circuit}` })
    else list.push(candidate)
  }
  const byThing = new Map(
    timeline.things.map((thing) => [
      thing.of,
      thingWindows(frame, heldToTrips(thing, frame.trips), partnersOf(timeline, thing, log)),
    ]),
  )
  const isJudged = (of: string): boolean => (byThing.get(of)?.length ?? 0) > 0
  const rain = rainOdds(log)
  const wet = wetTime(rain, log.dryings)
  const level = levelWindows(frame, log, ofOneThing(log, wet))
  // a device that opens too soon does so whoever made the level high
  const anyLevel = levelWindows(frame, log, NO_SPANS)
  const unlisted = log.timed.some((t) => timedFactor(log, t) >= GUILTY_LOOK)
    ? []
    : unlistedWindows(frame, log, wet !== null)
  for (const thing of timeline.things) {
    const odds = thingOdds(timeline, thing, log, isJudged) * innocence(log, thing.of)
    add(thing.of, odds, 'local', byThing.get(thing.of) ?? [])
  }
  add('rain', rain, 'weather', rainWindows(frame, log.dryings))
  add('temperature', ODDS.temperature, 'weather', temperatureWindows(frame))
  for (const kind of ['clock', 'period', 'sun'] as const) {
    const seen = timedWindows(frame, log, kind)
    const blind = kind === 'clock' ? clockWindows(frame) : kind === 'period' ? periodWindows(frame) : sunWindows(frame)
    // what the log shows to keep a schedule is likelier than what only trips would show
    const weight = seen.factor === null ? 0 : seen.factor
    const all = [...scaled(seen.windows, weight / (1 + weight)), ...scaled(blind, 1 / (1 + weight))]
    add(kind, ODDS[kind] * (1 + weight), 'local', all)
  }
  add('load-current', loadCurrentOdds(log), 'local', loadCurrentWindows(frame))
  if (tooSensitive) add('device', BAD_DEVICE, 'local', [...scaled(anyLevel, 0.5), ...always(frame, 'at any time', 0.5)])
  else {
    add('standing', standingOdds(log, measured.headroom), 'local', level)
    add('device', untestedDeviceOdds(timeline, measured, courses), 'local', anyLevel)
  }
  add('supply', ODDS.supply, 'supply', supplyWindows(frame))
  const irregular = unlisted.length === 0 ? 1 : isAbnormal(log) ? ABNORMAL : 4
  add('unlisted', ODDS.unlisted * irregular, 'local', [
    ...unlisted,
    ...always(frame, 'at any time', unlisted.length > 0 ? 0.5 : 1),
  ])
  return list
}

/**
 * Whoever else takes up much headroom while it runs, for a thing that by its leakage may well fire trips: the last milliamp is its,
 * the others only make it the last.
 */
function partnersOf(timeline: Timeline, thing: Thing, log: LogView): Partner[] {
  if (liftFactor(log.lifts.get(thing.of)) < GUILTY_LOOK) return []
  return timeline.things.flatMap(({ of, label, state }) =>
    of !== thing.of && (log.lifts.get(of)?.usualMa ?? 0) >= PARTNER_MA ? [{ of, label, on: state.on }] : [],
  )
}

/** Whether a schedule that the log shows may be of this kind: one that clock and sun explain alike is of both. */
function isOfKind({ schedule }: TimedCluster, kind: 'clock' | 'period' | 'sun'): boolean {
  return schedule.kind === kind || (kind === 'sun' && schedule.kind === 'clock' && schedule.sunMoved !== undefined)
}

/** When unnamed loads with such a schedule were due, and how suspicious the heaviest of them is; null without any. */
function timedWindows(
  frame: Frame,
  log: LogView,
  kind: 'clock' | 'period' | 'sun',
): { windows: ExposureWindow[]; factor: number | null } {
  const all = spansOf([[frame.timeline.from, frame.timeline.to]])
  const found = log.timed.filter((cluster) => isOfKind(cluster, kind))
  let factor: number | null = null
  const windows = found.flatMap((cluster, i): (ExposureWindow | null)[] => {
    const weight = timedFactor(log, cluster)
    factor = Math.max(factor ?? 0, weight)
    const words = `while an unnamed load was due (${whenWords(cluster.schedule)})`
    const starts = spansOf(
      [...eachSpan(cluster.due)].map(({ from, to }) => [from, Math.min(to, from + EARLY_MS)] as const),
    )
    const run: Layer = { inside: cluster.due, weight: 1 }
    const first: Layer = { inside: starts, weight: EARLY_TIMES - 1 }
    return [
      layeredWindow(frame, `due-${i}`, words, 0.5 * weight, [run], all),
      layeredWindow(frame, `due-early-${i}`, words, 0.5 * weight, [run, first], all),
    ]
  })
  return { windows: normalised(windows), factor }
}

function always(frame: Frame, words: string, prior: number): ExposureWindow[] {
  const inside = new Float64Array(frame.trips.length).fill(1)
  const hoursBy = frame.habits.map(() => frame.hours)
  return [
    { key: 'any', words, prior, hoursBy, inside, insideHours: frame.hours, weightsBy: frame.habits.map(() => inside) },
  ]
}

/**
 * When other devices opened: as exactly as their trips are known, so that an interval of hours that holds a trip of
 * this one says little and an instant much.
 */
function supplyWindows(frame: Frame): ExposureWindow[] {
  const { from, to, otherTrips } = frame.timeline
  const spans = spansOf(otherTrips.map((t) => [t.from - TOGETHER_MS, t.to + TOGETHER_MS] as const))
  const words = 'when another device opened too, as far as its trips are known'
  const together = windowOf(frame, 'together', words, 0.5, spans, spansOf([[from, to]]))
  return together === null
    ? always(frame, 'together with others', 1)
    : [together, ...always(frame, 'together with others', 0.5)]
}

function scaled(windows: readonly ExposureWindow[], by: number): ExposureWindow[] {
  return windows.map((w) => ({ ...w, prior: w.prior * by }))
}

/** Excursions that no named load accounts for or starts, seen apart from trips, and not the rain's. */
function unlistedWindows(frame: Frame, log: LogView, rainLifts: boolean): ExposureWindow[] {
  const { unexplained } = log
  if (unexplained === null || unexplained.apart < 3 || unexplained.follows !== null || rainLifts) return []
  const all = spansOf([[frame.timeline.from, frame.timeline.to]])
  const words = 'while the leakage stood far above what the listed loads explain'
  return withKicks(frame, 'unexplained', words, 0.5, [{ inside: unexplained.excursions, weight: 1 }], all)
}

/**
 * Odds that a device which nobody has tested opens too soon: where the leakage never came near half its rating only the
 * level at its trips can tell, the more so when it opened several times after a rise of its own. 0 otherwise.
 */
function untestedDeviceOdds(
  timeline: Timeline,
  { headroom }: Measured,
  courses: readonly TripFinding['course'][],
): number {
  const max = headroom.standingMa?.max
  if (headroom.tripMa.basis === 'ramp-tests' || max === undefined || max >= 0.9 * half(timeline)) return 0
  const risen = courses.filter((course) => course === 'step' || course === 'creep').length
  return ODDS.device * (risen >= LEAST_RISEN ? 10 : 1)
}

/** A ramp test below 0.5 IΔn, the current at which the standards forbid a trip (IEC 61008-1, IEC 61009-1, from memory). */
function isTooSensitive(timeline: Timeline, { headroom }: Measured): boolean {
  return headroom.tripMa.basis === 'ramp-tests' && headroom.tripMa.high < half(timeline)
}

function half(timeline: Timeline): number {
  return 0.5 * timeline.rcd.ratedMa
}
