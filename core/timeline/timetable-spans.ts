import type { Timetable } from '../contract/records.ts'
import type { Exposure } from './exposure.ts'
import type { LocalClock } from './local-clock.ts'
import { clip, NO_SPANS, type Spans, spansOf, subtract, union } from './spans.ts'

/**
 * The state of a thing by its timetables together: on where any of them says so, off where at least one holds and none
 * says on, unknown where none holds. A window belongs to the day it begins on; one that ends when it begins says
 * nothing. All within [from, to).
 */
export function exposureOfTimetables(
  timetables: readonly Timetable[],
  clock: LocalClock,
  from: number,
  to: number,
): Exposure {
  let on: Spans = NO_SPANS
  let valid: Spans = NO_SPANS
  for (const timetable of timetables) {
    const a = Math.max(from, timetable.from ?? from)
    const b = Math.min(to, timetable.until ?? to)
    if (a >= b) continue
    const [start, end] = timetable.onBetween.map(minutes) as [number, number]
    if (start === end) continue
    on = union(on, clock.dailySpans(a, b, start, end, timetable.days))
    valid = union(valid, spansOf([[a, b]]))
  }
  return { on: clip(on, from, to), off: subtract(valid, on) }
}

/** "HH:MM" as minutes since midnight. */
export function minutes(clockTime: string): number {
  return Number(clockTime.slice(0, 2)) * 60 + Number(clockTime.slice(3, 5))
}
