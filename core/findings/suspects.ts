import type { BudgetLine, Grade, Headroom, Reason, Role, Suspect, TripFinding } from '../contract/findings.ts'
import { usualInterval } from '../timeline/series.ts'
import { spansOf, totalMs, union } from '../timeline/spans.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import { episodes } from './episodes.ts'
import { type Candidate, type ExposureWindow, type LineUp, lineUp, type Standing } from './line-up.ts'
import { type LogView, logView } from './log-view.ts'
import { type CauseKind, courseRatio, type Pace } from './marks.ts'
import { type Preference, preferences } from './preference.ts'
import {
  ABNORMAL,
  innocence,
  isAbnormal,
  loadCurrentOdds,
  ODDS,
  rainOdds,
  standingOdds,
  thingOdds,
  wetTime,
} from './prior-odds.ts'
import { reasonsOf } from './reasons.ts'
import type { RunProfile } from './run-profiles.ts'
import { clockText, clockWindows, periodWindows } from './windows/clock-windows.ts'
import { heldToTrips } from './windows/held-to-trips.ts'
import { levelWindows } from './windows/level-windows.ts'
import { sunWindows } from './windows/sun-windows.ts'
import { thingWindows } from './windows/thing-windows.ts'
import { type Frame, HOUR_MS, marked, windowOf } from './windows/trip-share.ts'
import { dryings, loadCurrentWindows, rainWindows, temperatureWindows } from './windows/weather-windows.ts'
import { nameOf, rounded } from './words.ts'

/** A device that opens too soon is fired by any sound load: how far the odds of all else fall then. */
const UNDER_A_BAD_DEVICE = 0.001
/** Odds of a device that a test, or its own trips, showed to open too soon: measured, not guessed. */
const BAD_DEVICE = 600

/** Times of people and loggers differ by this much. */
const TOGETHER_MS = 60_000

/** Below this a suspect with contrast is cleared; grades of methods.md §8. */
const CLEARED = 0.02

export interface Weighed {
  readonly suspects: Suspect[]
  /** What the log says by itself. */
  readonly log: LogView
  readonly frame: Frame
  readonly lineUp: LineUp
}

/** What the other findings say that the line-up uses. */
export interface Measured {
  readonly trips: readonly TripFinding[]
  readonly profiles: ReadonlyMap<string, RunProfile>
  readonly budget: readonly BudgetLine[]
  readonly headroom: Headroom
}

/**
 * One probability for each suspect (methods.md §8): candidates with their windows, weighed together; then words,
 * grades and roles. Sorted by probability, then name. A circuit or load without contrast is `unjudged`.
 */
export function suspects(timeline: Timeline, measured: Measured): Weighed {
  const hours = totalMs(timeline.energised) / HOUR_MS
  const kept = episodes(timeline.trips)
  const frame: Frame = { timeline, hours, trips: kept }
  const log = logView(timeline, measured.budget, measured.profiles, measured.headroom)
  const courses = kept.map((trip) => measured.trips[timeline.trips.indexOf(trip)]?.course ?? 'unseen')
  const candidates = kept.length === 0 || hours <= 0 ? [] : candidatesOf(frame, courses, measured, log)
  const weighed: LineUp =
    candidates.length === 0 ? { standings: [], none: 1, unexplained: 1 } : lineUp(hours, kept.length, candidates)
  const tested = weighed.standings.flatMap((s) => {
    const top = s.windows[0]
    return top === undefined ? [] : [{ of: s.of, window: top.window }]
  })
  const prefer = new Map(preferences(Math.max(hours, 1e-9), kept.length, tested).map((p) => [p.of, p]))
  const judged = weighed.standings.map((s) =>
    judgedSuspect(frame, s, prefer.get(s.of), measured, weighed.standings, log),
  )
  const seen = new Set(judged.map((s) => s.of))
  const unjudged = timeline.things.filter((t) => !seen.has(t.of)).map((t) => unjudgedSuspect(t, weighed.none))
  const none = noneSuspect(timeline, frame, weighed)
  const all = [...judged, ...unjudged, none]
  all.sort((a, b) => b.probability - a.probability || (a.of < b.of ? -1 : 1))
  return { suspects: all, log, frame, lineUp: weighed }
}

function candidatesOf(
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
    list.push({ of, odds, windows: paced })
  }
  const byThing = new Map(
    timeline.things.map((thing) => [thing.of, thingWindows(frame, heldToTrips(thing, frame.trips))]),
  )
  const isJudged = (of: string): boolean => (byThing.get(of)?.length ?? 0) > 0
  const laws = dryings(frame, log.unexplained?.remainder ?? null)
  const rain = rainOdds(timeline, log, laws)
  const wet = wetTime(rain, laws)
  const level = levelWindows(frame, log, wet)
  const unlisted = unlistedWindows(frame, log, wet !== null)
  for (const thing of timeline.things) {
    const odds = thingOdds(timeline, thing, log, isJudged) * (unlisted.length > 0 ? innocence(log, thing.of) : 1)
    add(thing.of, odds, 'local', byThing.get(thing.of) ?? [])
  }
  add('rain', rain, 'weather', rainWindows(frame, laws))
  add('temperature', ODDS.temperature, 'weather', temperatureWindows(frame))
  // what comes by a schedule is named by it: the excursions' window goes to the clock or the period
  const schedule = unlisted.length === 0 ? 'none' : log.schedule.kind
  const weight = unlisted.length === 0 ? 1 : isAbnormal(log) ? ABNORMAL : 4
  const clocked = schedule === 'clock' ? weight : 1
  const periodic = schedule === 'period' ? weight : 1
  const share = (windows: readonly ExposureWindow[], by: number): ExposureWindow[] =>
    by > 1 ? [...unlisted, ...scaled(windows, 0.5)] : [...windows]
  add('clock', ODDS.clock * clocked, 'local', share(clockWindows(frame), clocked))
  add('period', ODDS.period * periodic, 'local', share(periodWindows(frame), periodic))
  add('sun', ODDS.sun, 'local', sunWindows(frame))
  add('load-current', loadCurrentOdds(log), 'local', loadCurrentWindows(frame))
  if (tooSensitive) add('device', BAD_DEVICE, 'local', [...scaled(level, 0.5), ...always(frame, 'at any time', 0.5)])
  else add('standing', standingOdds(log, measured.headroom), 'local', level)
  add('supply', ODDS.supply, 'supply', supplyWindows(frame))
  add('unlisted', ODDS.unlisted * (schedule === 'none' ? weight : 1), 'local', [
    ...unlisted,
    ...always(frame, 'at any time', unlisted.length > 0 ? 0.5 : 1),
  ])
  return list
}

function always(frame: Frame, words: string, prior: number): ExposureWindow[] {
  const inside = new Float64Array(frame.trips.length).fill(1)
  return [{ key: 'any', words, prior, hours: frame.hours, inside, weights: inside }]
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
  const window = windowOf(frame, 'unexplained', words, 0.5, unexplained.excursions, all)
  return window === null ? [] : [window]
}

/**
 * A device that opens below 0.5 IΔn, the current at which the standards forbid a trip (IEC 61008-1, IEC 61009-1, from
 * memory): by a ramp test, or because it opened at least three times after a visible rise, and the leakage never came
 * near that current.
 */
function isTooSensitive(timeline: Timeline, { headroom, trips }: Measured): boolean {
  const half = 0.5 * timeline.rcd.ratedMa
  if (headroom.tripMa.basis === 'ramp-tests') return headroom.tripMa.high < half
  const risen = trips.filter((t) => t.levelMa !== null && (t.course === 'step' || t.course === 'creep'))
  return risen.length >= 3 && (headroom.standingMa?.max ?? half) < 0.9 * half
}

function judgedSuspect(
  frame: Frame,
  standing: Standing,
  preference: Preference | undefined,
  measured: Measured,
  all: readonly Standing[],
  log: LogView,
): Suspect {
  const { timeline } = frame
  const probability = rounded(standing.probability)
  const contrast = hasContrast(frame, standing)
  const grade = gradeOf(probability, contrast)
  const top = standing.windows[0]?.window
  const same = sameExposure(frame, standing, all)
  const leading = all.reduce((best, s) => (s.probability > best.probability ? s : best), standing)
  const leader = leading === standing || leading.probability < 0.6 ? null : nameOf(timeline, leading.of)
  const because: Reason[] = reasonsOf(timeline, standing.of, preference, measured, grade, leader)
  const suspect: Suspect = {
    of: standing.of,
    label: nameOf(timeline, standing.of),
    probability,
    share: rounded(standing.share),
    grade,
    role: roleOf(standing.of, measured),
    because,
    next: nextFor(timeline, standing.of, grade, same),
  }
  if (same.length > 0) suspect.sameAs = same
  const { schedule } = log
  const bySteps = top?.key === 'unexplained'
  if (standing.of === 'clock' && top !== undefined) {
    suspect.localTime = bySteps && schedule.kind === 'clock' ? clockText(schedule.minute) : top.key.split('+')[0]!
  }
  if (standing.of === 'period' && top !== undefined) {
    suspect.hours = bySteps && schedule.kind === 'period' ? rounded(schedule.hours) : Number.parseFloat(top.key)
  }
  return suspect
}

/** Whether the suspect had time on both sides in which three trips could have told: a cleared suspect was tried. */
function hasContrast(frame: Frame, standing: Standing): boolean {
  return standing.windows.some(({ window }) => {
    const expected = (frame.trips.length * window.hours) / frame.hours
    return expected >= 0.5 || window.hours >= 2
  })
}

function gradeOf(probability: number, contrast: boolean): Grade {
  if (probability >= 0.9) return 'strong'
  if (probability >= 0.6) return 'fair'
  if (probability <= CLEARED && contrast) return 'cleared'
  return 'slight'
}

/** Suspects whose best windows hold the same trips and the same hours: the data cannot tell them apart. */
function sameExposure(frame: Frame, standing: Standing, all: readonly Standing[]): string[] {
  const mine = standing.windows[0]?.window
  if (mine === undefined || standing.probability < 0.05) return []
  return all
    .filter((other) => other !== standing && other.probability >= 0.05)
    .filter(({ windows }) => {
      const theirs = windows[0]?.window
      if (theirs === undefined) return false
      const hours = Math.abs(theirs.hours - mine.hours) <= 0.05 * Math.max(theirs.hours, mine.hours)
      return hours && frame.trips.every((_, i) => Math.abs(theirs.inside[i]! - mine.inside[i]!) < 0.05)
    })
    .map((other) => other.of)
}

/** Firing trips and using up headroom are two questions; both are answered here. */
function roleOf(of: string, measured: Measured): Role {
  if (of === 'standing') return 'contributor'
  const line = measured.budget.find((b) => b.of === of)
  const standing = measured.headroom.standingMa?.p50 ?? 0
  if (line === undefined || line.ma === null || standing === 0) return 'trigger'
  return line.ma >= 0.15 * standing ? 'both' : 'trigger'
}

function nextFor(timeline: Timeline, of: string, grade: Grade, same: readonly string[]): string {
  const name = nameOf(timeline, of)
  if (same.length > 0) {
    return `Switch ${name} and ${same.map((s) => nameOf(timeline, s)).join(', ')} at different times for some days: they were always on together.`
  }
  if (grade === 'cleared') return 'Nothing; look elsewhere first.'
  const thing = timeline.things.find((t) => t.of === of)
  if (thing?.kind === 'load')
    return `Unplug ${name} for some days and see whether the trips stop; test its insulation at the plug.`
  if (thing?.kind === 'circuit')
    return `Isolate ${name} in both poles for some days; test its insulation with the loads unplugged.`
  return NEXT[of] ?? ''
}

const NEXT: Readonly<Record<string, string>> = {
  rain: 'Isolate the outdoor circuits in both poles in the next wet spell; open outdoor accessories and look for water.',
  temperature: 'Look for heaters with a thermostat and for frost protection; note what runs at such temperatures.',
  clock: 'Look for a timer, an off-peak heater or a defrost clock that switches at this time.',
  period: 'Look for an appliance with a cycle of this length: defrost, softener, pump.',
  sun: 'Look for lights on a photocell; isolate them for some evenings.',
  'load-current':
    'Test neutral to earth with the neutrals out of the bar; switching off the breaker alone changes nothing.',
  standing: 'Spread the circuits over more devices, or take the largest contributors off this one.',
  supply: 'Ask the network operator for events at these times; look at surge protection and earthing.',
  device:
    'Repeat the ramp test with all circuits disconnected; a device that opens below half its rating is to be replaced.',
  unlisted: 'Walk the site for what is not on the sheet; clamp circuit by circuit while the level is up.',
}

function unjudgedSuspect(thing: Thing, none: number): Suspect {
  const odds = ODDS[thing.kind]
  const known = totalMs(union(thing.state.on, thing.state.off)) > 0
  const text = known
    ? `${sentence(thing)} never changed its state while trips could happen, so switching says nothing about it. That does not clear it.`
    : `Nobody knows when ${thing.label} was on, so nothing can be said about it. That does not clear it.`
  return {
    of: thing.of,
    label: thing.label,
    probability: rounded((none * odds) / (1 + odds)),
    share: 0,
    grade: 'unjudged',
    role: 'trigger',
    because: [{ text, method: 'contrast of exposures', figures: { changes: thing.changes.length } }],
    next:
      thing.kind === 'circuit'
        ? `Switch ${thing.label} off for some days, in both poles.`
        : `Log when ${thing.label} runs, or unplug it for some days.`,
  }
}

function sentence(thing: Thing): string {
  return thing.label.charAt(0).toUpperCase() + thing.label.slice(1)
}

function noneSuspect(timeline: Timeline, frame: Frame, weighed: LineUp): Suspect {
  const n = frame.trips.length
  const probability = rounded(weighed.none)
  return {
    of: 'none',
    label: nameOf(timeline, 'none'),
    probability,
    share: rounded(weighed.unexplained),
    grade: n === 0 ? 'unjudged' : gradeOf(probability, n >= 3),
    role: 'trigger',
    because: [
      {
        text:
          n === 0
            ? 'There was no trip in this span.'
            : `If nothing listed is behind them, trips come at ${((n / frame.hours) * 168).toFixed(1)} a week at random times.`,
        method: 'gamma–Poisson marginal likelihood of no cause',
        figures: { trips: n, energisedHours: rounded(frame.hours) },
      },
    ],
    next: n === 0 ? 'Leave the logger on site.' : 'Leave the logger longer, and log what is not logged yet.',
  }
}
