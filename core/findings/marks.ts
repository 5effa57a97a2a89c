import type { TripFinding } from '../contract/findings.ts'

type Course = TripFinding['course']

/** What kind of cause a suspect would be, for what the leakage before a trip says about it. */
export type CauseKind = 'load' | 'weather' | 'schedule' | 'load-current' | 'standing' | 'supply' | 'device' | 'unlisted'

/**
 * How often each course is seen before a trip, by kind of cause, when the logger looks closely. A transient (the
 * background) leaves no trace or takes other devices with it; a leaking load steps or climbs; wet insulation creeps.
 * Judgement from the mechanisms of domain.md, tuned on simulated sites; common practice, no source.
 */
const SEEN: Readonly<Record<CauseKind | 'background', Readonly<Record<Exclude<Course, 'unseen'>, number>>>> = {
  background: { sudden: 0.8, step: 0.1, creep: 0.06, shared: 0.04 },
  load: { sudden: 0.4, step: 0.34, creep: 0.24, shared: 0.02 },
  weather: { sudden: 0.4, step: 0.16, creep: 0.42, shared: 0.02 },
  schedule: { sudden: 0.42, step: 0.34, creep: 0.22, shared: 0.02 },
  'load-current': { sudden: 0.4, step: 0.36, creep: 0.22, shared: 0.02 },
  standing: { sudden: 0.42, step: 0.34, creep: 0.22, shared: 0.02 },
  supply: { sudden: 0.1, step: 0.02, creep: 0.01, shared: 0.87 },
  device: { sudden: 0.5, step: 0.3, creep: 0.18, shared: 0.02 },
  unlisted: { sudden: 0.38, step: 0.36, creep: 0.24, shared: 0.02 },
}

/** What a logger that reads too seldom sees of any cause: nearly always nothing. */
const BLIND: Readonly<Record<Exclude<Course, 'unseen'>, number>> = {
  sudden: 0.88,
  step: 0.06,
  creep: 0.04,
  shared: 0.02,
}
/** A logger that reads so often sees what there is to see; one that reads ten times as seldom a tenth of it. */
const SEES_ALL_MS = 10_000

/**
 * Chance of a trip's course under a kind of cause over its chance under the background; 1 when nothing was seen.
 * `intervalMs` is the leakage logger's usual interval: the seldomer it reads, the less a course says.
 */
export function courseRatio(kind: CauseKind, course: Course, intervalMs: number): number {
  if (course === 'unseen') return 1
  // together with others is seen by their own trips, not by the log
  const sees = course === 'shared' ? 1 : Math.min(1, SEES_ALL_MS / Math.max(1, intervalMs))
  const chance = (of: CauseKind | 'background'): number => sees * SEEN[of][course] + (1 - sees) * BLIND[course]
  return chance(kind) / chance('background')
}
