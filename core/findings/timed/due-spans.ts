import { type Spans, spansOf } from '../../timeline/spans.ts'
import type { RunClock } from './run-clock.ts'
import type { TimedSchedule } from './schedule.ts'

const MINUTE_MS = 60_000

/** When a schedule has its load run, over the whole span: from each start due, a spread early, for `minutes` and a spread. */
export function dueSpans(schedule: TimedSchedule, minutes: number, clock: RunClock): Spans {
  const early = schedule.spreadMinutes * MINUTE_MS
  const late = (minutes + schedule.spreadMinutes) * MINUTE_MS
  return spansOf(startsDue(schedule, late, clock).map((t) => [t - early, t + late] as const))
}

function startsDue(schedule: TimedSchedule, reach: number, { timeline, wall, sun, hours }: RunClock): number[] {
  const { from, to } = timeline
  switch (schedule.kind) {
    case 'clock':
      return schedule.minutes.flatMap((minute) => {
        const whole = Math.floor(minute)
        const spans = wall.dailySpans(from - reach, to, whole, whole + 1, schedule.days)
        return [...spans.filter((_, i) => i % 2 === 0)].map((t) => t + (minute - whole) * MINUTE_MS)
      })
    case 'sun': {
      const starts = sun === null ? [] : [...sun[schedule.event]].map((t) => t + schedule.offsetMinutes * MINUTE_MS)
      return starts.filter((t) => t > from - reach && t < to)
    }
    case 'period': {
      const { of, instant } = hours[schedule.on]
      const anew = schedule.begunAnew ?? [schedule.phaseHours]
      return anew.flatMap((phase, i) => {
        // the first stretch reaches back to the beginning, each ends where the next begins
        const first = i === 0 ? -Math.ceil(phase / schedule.hours) - 1 : 0
        const end = anew[i + 1] ?? of(to) + schedule.hours
        const count = Math.max(0, Math.ceil((end - phase) / schedule.hours - 1e-9 - first))
        return Array.from({ length: count }, (_, k) => instant(phase + (first + k) * schedule.hours))
      })
    }
    default:
      return schedule satisfies never
  }
}
