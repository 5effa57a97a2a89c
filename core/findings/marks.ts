import type { TripFinding } from '../contract/findings.ts'

type Course = TripFinding['course']

/** What kind of cause a suspect would be, for what the leakage before a trip says about it. */
export type CauseKind = 'local' | 'weather' | 'supply'

/** A cause either lifts the leakage past the trip current at once, or over a time that a log can show. */
export type Pace = 'at-once' | 'visibly'

type Seen = Readonly<Record<Exclude<Course, 'unseen'>, number>>

/**
 * How often each course is seen before a trip, by kind of cause, when the logger looks closely. A transient (the
 * background) leaves no trace or takes other devices with it; a leaking load jumps, steps or climbs; wet insulation
 * creeps. Judgement from the mechanisms of domain.md, tuned on simulated sites; common practice, no source.
 */
const BACKGROUND: Seen = { sudden: 0.8, step: 0.1, creep: 0.06, shared: 0.04 }
const LOCAL: Readonly<Record<Pace, Seen>> = {
  'at-once': { sudden: 0.84, step: 0.09, creep: 0.05, shared: 0.02 },
  visibly: { sudden: 0.14, step: 0.5, creep: 0.34, shared: 0.02 },
}
const WEATHER: Readonly<Record<Pace, Seen>> = {
  'at-once': LOCAL['at-once'],
  visibly: { sudden: 0.25, step: 0.15, creep: 0.58, shared: 0.02 },
}
const SUPPLY: Seen = { sudden: 0.1, step: 0.02, creep: 0.01, shared: 0.87 }
const SEEN: Readonly<Record<CauseKind, Readonly<Record<Pace, Seen>>>> = {
  local: LOCAL,
  weather: WEATHER,
  supply: { 'at-once': SUPPLY, visibly: SUPPLY },
}
/** What a logger that reads too seldom sees of any cause: nearly always nothing. */
const BLIND: Seen = { sudden: 0.88, step: 0.06, creep: 0.04, shared: 0.02 }
/** A logger that reads so often sees what there is to see; one that reads ten times as seldom a tenth of it. */
const SEES_ALL_MS = 10_000

/**
 * Chance of a trip's course under a kind of cause over its chance under the background; 1 when nothing was seen.
 * `intervalMs` is the leakage logger's usual interval: the seldomer it reads, the less a course says.
 */
export function courseRatio(kind: CauseKind, pace: Pace, course: Course, intervalMs: number): number {
  if (course === 'unseen') return 1
  // together with others is seen by their own trips, not by the log
  const sees = course === 'shared' ? 1 : Math.min(1, SEES_ALL_MS / Math.max(1, intervalMs))
  const chance = (seen: Seen): number => sees * seen[course] + (1 - sees) * BLIND[course]
  return chance(SEEN[kind][pace]) / chance(BACKGROUND)
}
