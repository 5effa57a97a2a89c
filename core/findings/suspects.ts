import type { Grade, Reason, Role, Suspect } from '../contract/findings.ts'
import { knownOf } from '../timeline/exposure.ts'
import { totalMs } from '../timeline/spans.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import { nextFor } from './advice.ts'
import { candidatesOf, type Measured } from './candidates.ts'
import { episodes } from './episodes.ts'
import { type ExposureWindow, type LineUp, lineUp, type Standing } from './line-up.ts'
import { logReason } from './log-reasons.ts'
import { type LogView, logView } from './log-view.ts'
import { type Preference, preferences } from './preference.ts'
import { priorReason, rateReason } from './preferring/rate-reason.ts'
import { ODDS } from './prior-odds.ts'
import { notedReason, reasonsOf } from './reasons.ts'
import { speakingCourse } from './speaking-course.ts'
import { clockText } from './windows/clock-windows.ts'
import { habitsOf } from './windows/habits.ts'
import { highTime } from './windows/high-time.ts'
import { kicksOf } from './windows/kicks.ts'
import { type Frame, HOUR_MS } from './windows/trip-share.ts'
import { nameOf, rounded, sentence } from './words.ts'

/** Below this a suspect with contrast is cleared; grades of methods.md §8. */
const CLEARED = 0.02

/** The time of a window, and how it is spoken of. */
export type SpokenWindow = NonNullable<ExposureWindow['when']> & { readonly words: string }

/** The line-up in words, and what it rests on. */
export interface Weighed {
  readonly suspects: Suspect[]
  /** What the log says by itself. */
  readonly log: LogView
  readonly frame: Frame
  readonly sets: LineUp['sets']
  /** The time of each suspect's likeliest window. */
  readonly windows: ReadonlyMap<string, SpokenWindow>
}

/**
 * One probability for each suspect (methods.md §8): candidates with their windows, weighed together; then words,
 * grades and roles. Sorted by probability, then name. A circuit or load without contrast is `unjudged`.
 */
export function suspects(timeline: Timeline, measured: Measured): Weighed {
  const hours = totalMs(timeline.energised) / HOUR_MS
  const kept = episodes(timeline.trips)
  const log = logView(timeline, measured.budget, measured.profiles, measured.headroom)
  const habits = habitsOf(timeline, kept)
  const frame: Frame = { timeline, hours, trips: kept, habits, kicks: kicksOf(timeline), high: highTime(log.minutes) }
  const courses = kept.map((trip) => speakingCourse(timeline, trip, measured, log))
  const candidates = kept.length === 0 || hours <= 0 ? [] : candidatesOf(frame, courses, measured, log)
  const weighed: LineUp =
    candidates.length === 0
      ? { standings: [], none: 1, unexplained: 1, sets: [] }
      : lineUp(hours, kept.length, candidates, frame.habits)
  const tested = weighed.standings.flatMap((s, c) => {
    const top = s.windows[0]
    return top === undefined ? [] : [{ of: s.of, window: top.window, family: candidates[c]?.windows ?? [] }]
  })
  const prefer = new Map(preferences(frame, tested).map((p) => [p.of, p]))
  const judged = weighed.standings.map((s) =>
    judgedSuspect(frame, s, prefer.get(s.of), measured, weighed.standings, log),
  )
  const seen = new Set(judged.map((s) => s.of))
  const unjudged = timeline.things.filter((t) => !seen.has(t.of)).map((t) => unjudgedSuspect(timeline, t, weighed.none))
  const none = noneSuspect(frame, weighed, measured, log)
  const all = [...judged, ...unjudged, none]
  all.sort((a, b) => b.probability - a.probability || (a.of < b.of ? -1 : 1))
  const windows = new Map(
    tested.flatMap(({ of, window: { when, words } }) =>
      when === undefined ? [] : [[of, { ...when, words }] as const],
    ),
  )
  return { suspects: all, log, frame, sets: weighed.sets, windows }
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
  const because: Reason[] = reasonsOf(timeline, standing.of, preference, measured, log, grade, leader)
  const suspect: Suspect = {
    of: standing.of,
    label: nameOf(timeline, standing.of),
    probability,
    share: rounded(standing.share),
    grade,
    role: roleOf(standing.of, probability, measured),
    because,
    next: nextFor(timeline, standing.of, grade, same),
  }
  if (same.length > 0) suspect.sameAs = same
  const due = top?.key.startsWith('due-') === true ? log.timed.find((t) => t.schedule.kind === standing.of) : undefined
  if (standing.of === 'clock' && top !== undefined) {
    suspect.localTime =
      due?.schedule.kind === 'clock' ? clockText(due.schedule.minutes[0] ?? 0) : (top.key.split('+')[0] ?? '')
  }
  if (standing.of === 'period' && top !== undefined) {
    suspect.hours = due?.schedule.kind === 'period' ? rounded(due.schedule.hours) : Number.parseFloat(top.key)
  }
  return suspect
}

/**
 * Whether the suspect was tried: some window of it left out a part of the time. A cause that may act at any time has
 * no contrast, and can never be cleared by when trips came.
 */
function hasContrast(frame: Frame, standing: Standing): boolean {
  return standing.windows.some(({ window }) => window.insideHours < 0.98 * frame.hours)
}

function gradeOf(probability: number, contrast: boolean): Grade {
  if (probability >= 0.9) return 'strong'
  if (probability >= 0.6) return 'fair'
  if (probability >= 0.2) return 'slight'
  if (!contrast) return 'unjudged'
  return probability <= CLEARED ? 'cleared' : 'slight'
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
      const hours =
        Math.abs(theirs.insideHours - mine.insideHours) <= 0.05 * Math.max(theirs.insideHours, mine.insideHours)
      return hours && frame.trips.every((_, i) => Math.abs(theirs.inside[i]! - mine.inside[i]!) < 0.05)
    })
    .map((other) => other.of)
}

/** Share of the standing leakage from which on a thing uses headroom up, and probability from which on it may fire trips. */
const USES = 0.15
const FIRES = 0.2

/** Firing trips and using up headroom are two questions; both are answered here. */
function roleOf(of: string, probability: number, measured: Measured): Role {
  if (of === 'standing') return 'contributor'
  const line = measured.budget.find((b) => b.of === of)
  const standing = measured.headroom.standingMa?.p50 ?? 0
  const uses = standing > 0 && (line?.ma ?? 0) >= USES * standing
  if (!uses) return 'trigger'
  return probability >= FIRES ? 'both' : 'contributor'
}

function unjudgedSuspect(timeline: Timeline, thing: Thing, none: number): Suspect {
  const odds = ODDS[thing.kind]
  const name = nameOf(timeline, thing.of)
  const known = totalMs(knownOf(thing.state)) > 0
  const text = known
    ? `${sentence(name)} never changed its state while trips could happen, so switching says nothing about it. That does not clear it.`
    : `Nobody knows when ${name} was on, so nothing can be said about it. That does not clear it.`
  const contrast: Reason = { text, method: 'contrast of exposures', figures: { changes: thing.changes.length } }
  const noted = notedReason(timeline, thing.of)
  const probability = (none * odds) / (1 + odds)
  return {
    of: thing.of,
    label: name,
    probability: rounded(probability),
    share: 0,
    grade: 'unjudged',
    role: 'trigger',
    because: [contrast, noted ?? priorReason(probability)],
    next:
      thing.kind === 'circuit'
        ? `Switch ${name} off for some days, in both poles.`
        : `Log when ${name} runs, or unplug it for some days.`,
  }
}

function noneSuspect(frame: Frame, weighed: LineUp, measured: Measured, log: LogView): Suspect {
  const { timeline } = frame
  const byLog = logReason(timeline, 'none', measured, log)
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
      ...(byLog === null ? [] : [byLog]),
      rateReason(n, frame.hours),
    ],
    next: n === 0 ? 'Leave the logger on site.' : 'Leave the logger longer, and log what is not logged yet.',
  }
}
