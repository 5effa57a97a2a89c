import { fisherExact } from '../../statistics/fisher-exact.ts'
import { WEEKDAYS, type Weekday } from '../../timeline/local-clock.ts'
import { lowerBound } from '../../timeline/series.ts'
import { type DueStarts, dueStarts } from './due-starts.ts'
import {
  type DayPlace,
  EXACT,
  type Gathering,
  gathering,
  LEAST_STARTS,
  LOOSE,
  onCircle,
  ROUND,
  wayRound,
  windowsTried,
} from './gathering.ts'
import type { RaisedRun } from './raised-runs.ts'
import type { Kept, RunClock } from './run-clock.ts'
import type { ClockSchedule, SunSchedule } from './schedule.ts'

const MINUTE_MS = 60_000
const HALF_DAY_MS = 12 * 60 * MINUTE_MS
/** Least share of the starts due that came. */
const LEAST_KEPT = 0.5
/** The same for any set of days but workdays and weekends: a switch keeps to its days, people nearly do. */
const LEAST_KEPT_ON_SOME = 0.8
/** Sets of weekdays are spoken of when Fisher's test parts them so clearly; as many sets as this are paid for. */
const PARTED = 0.01
const SETS_TRIED = 20
/** Most of the starts due on the other days that may have come by chance. */
const STRAY = 0.15
/** What keeps to the sun does so within so many minutes of sunset or sunrise. */
const FARTHEST = 120
const WORKDAYS: readonly Weekday[] = ['mon', 'tue', 'wed', 'thu', 'fri']
const WEEKEND: readonly Weekday[] = ['sat', 'sun']

/** The fixed clock time that runs keep best, every day or on some weekdays. */
export function clockSchedule(runs: readonly RaisedRun[], clock: RunClock): Kept<ClockSchedule> | null {
  const { wall } = clock
  const places = runs.map(({ from }): DayPlace => ({ minute: wall.minuteOfDay(from), day: wall.dayNumber(from) }))
  const found = gathering(places, EXACT)
  if (found === null) return null
  const minute = Math.floor(found.minute)
  const spans = wall.dailySpans(runs[0]!.from - HALF_DAY_MS, runs.at(-1)!.from + HALF_DAY_MS, minute, minute + 1)
  const fit = dueStarts(
    runs,
    spans.filter((_, i) => i % 2 === 0),
    toleranceOf(found, clock),
    clock,
  )
  if (fit === null) return null
  const days = weekdaysOf(fit, wall.weekday)
  if (days === null) return null
  const due = fit.due.flatMap((at, i) => (days.includes(wall.weekday(at)) ? [fit.came[i]!] : []))
  const members = fit.members.filter(({ from }) => days.includes(wall.weekday(from - fit.offsetMinutes * MINUTE_MS)))
  if (members.length < LEAST_STARTS) return null
  const schedule: ClockSchedule = {
    kind: 'clock',
    minutes: [onCircle(minute + fit.offsetMinutes)],
    days,
    spreadMinutes: fit.spreadMinutes,
    kept: shareOf(due),
    p: Math.min(1, found.p * windowsTried(EXACT) * (days.length === 7 ? 1 : SETS_TRIED)),
  }
  return { schedule, members }
}

/** The fixed time from sunset or sunrise that runs keep best; null without coordinates. */
export function sunSchedule(runs: readonly RaisedRun[], clock: RunClock): Kept<SunSchedule> | null {
  if (clock.sun === null) return null
  let best: Kept<SunSchedule> | null = null
  for (const event of ['sunset', 'sunrise'] as const) {
    const times = clock.sun[event]
    if (times.length === 0) continue
    const places = runs.flatMap(({ from }): DayPlace[] => {
      const next = lowerBound(times, from - HALF_DAY_MS)
      const minute = (from - times[Math.min(next, times.length - 1)]!) / MINUTE_MS
      return Math.abs(minute) > FARTHEST + ROUND ? [] : [{ minute: onCircle(minute), day: next }]
    })
    const found = gathering(places, LOOSE)
    if (found === null) continue
    const offset = wayRound(found.minute, 0)
    if (Math.abs(offset) > FARTHEST) continue
    const fit = dueStarts(
      runs,
      times.map((t) => t + offset * MINUTE_MS),
      toleranceOf(found, clock),
      clock,
    )
    if (fit === null || fit.members.length < LEAST_STARTS || shareOf(fit.came) < LEAST_KEPT) continue
    const p = Math.min(1, 2 * found.p * windowsTried(LOOSE, 2 * FARTHEST))
    if (best !== null && p >= best.schedule.p) continue
    const schedule: SunSchedule = {
      kind: 'sun',
      event,
      offsetMinutes: offset + fit.offsetMinutes,
      spreadMinutes: fit.spreadMinutes,
      kept: shareOf(fit.came),
      p,
    }
    best = { schedule, members: fit.members }
  }
  return best
}

function toleranceOf(found: Gathering, clock: RunClock): number {
  return Math.max((found.width / 2 + 1) * MINUTE_MS, 1.5 * clock.stepMs)
}

function shareOf(came: readonly boolean[]): number {
  return came.length === 0 ? 0 : came.filter((yes) => yes).length / came.length
}

/** All days, or those on which it comes when it comes on hardly any of the others; null when it keeps to neither. */
function weekdaysOf({ due, came }: DueStarts, weekday: (t: number) => Weekday): readonly Weekday[] | null {
  const counts = new Map(WEEKDAYS.map((day) => [day, { came: 0, due: 0 }]))
  due.forEach((at, i) => {
    const count = counts.get(weekday(at))!
    count.due++
    if (came[i]) count.came++
  })
  const often = WEEKDAYS.filter((day) => counts.get(day)!.came >= Math.max(1, LEAST_KEPT * counts.get(day)!.due))
  const sum = (days: readonly Weekday[]): { came: number; due: number } =>
    days.reduce((s, d) => ({ came: s.came + counts.get(d)!.came, due: s.due + counts.get(d)!.due }), {
      came: 0,
      due: 0,
    })
  for (const days of [often, WORKDAYS, WEEKEND]) {
    if (days.length === 0 || days.length === WEEKDAYS.length) continue
    const [inside, outside] = [sum(days), sum(WEEKDAYS.filter((day) => !days.includes(day)))]
    const least = days === often ? LEAST_KEPT_ON_SOME : LEAST_KEPT
    if (outside.due === 0 || outside.came > STRAY * outside.due || inside.came < least * inside.due) continue
    const test = fisherExact([
      [inside.came, inside.due - inside.came],
      [outside.came, outside.due - outside.came],
    ])
    if (test.pTwoSided <= PARTED) return days
  }
  const all = sum(WEEKDAYS)
  return all.came >= LEAST_KEPT * all.due ? WEEKDAYS : null
}
