import type { SiteClock } from '../format/site-clock.ts'
import type { View } from './view.ts'

const MINUTE = 60_000
const HOUR = 60 * MINUTE
const DAY = 24 * HOUR

const STEPS: readonly number[] = [
  1_000,
  5_000,
  15_000,
  30_000,
  ...[1, 2, 5, 10, 15, 30].map((n) => n * MINUTE),
  ...[1, 2, 3, 6, 12].map((n) => n * HOUR),
  ...[1, 2, 7, 14, 28, 56, 182].map((n) => n * DAY),
]

export interface Tick {
  readonly at: number
  readonly text: string
  /** At local midnight: the day is named. */
  readonly day: boolean
}

/**
 * Marks of the time axis on round times of the site's wall clock, at most `most` of them. Below a day they count from
 * each local midnight, so that they stay round across both changes of the hour.
 */
export function ticksOf(view: View, clock: SiteClock, most: number): Tick[] {
  const least = (view.to - view.from) / Math.max(1, most)
  const step = STEPS.find((candidate) => candidate >= least) ?? Math.ceil(least / (364 * DAY)) * 364 * DAY
  return step >= DAY ? dayTicks(view, clock, Math.round(step / DAY)) : timeTicks(view, clock, step)
}

function dayTicks(view: View, clock: SiteClock, days: number): Tick[] {
  const ticks: Tick[] = []
  const first = clock.midnight(view.from)
  for (let n = first < view.from ? 1 : 0; ; n += days) {
    const at = clock.midnight(first, n)
    if (at > view.to) return ticks
    ticks.push({ at, text: clock.day(at), day: true })
  }
}

function timeTicks(view: View, clock: SiteClock, step: number): Tick[] {
  const ticks: Tick[] = []
  for (let midnight = clock.midnight(view.from); midnight <= view.to; midnight = clock.midnight(midnight, 1)) {
    const next = clock.midnight(midnight, 1)
    const { year, month, day } = clock.wall(midnight)
    // The clock may have been changed by up to two hours since midnight, so that much is looked at on both sides.
    const first = Math.max(0, Math.floor((view.from - midnight - 2 * HOUR) / step) * step)
    const last = Math.min(DAY, view.to - midnight + 2 * HOUR)
    for (let local = first; local < last; local += step) {
      const seconds = local / 1000
      const at = clock.instant({
        year,
        month,
        day,
        hour: Math.floor(seconds / 3600),
        minute: Math.floor((seconds % 3600) / 60),
        second: seconds % 60,
      })
      if (at < view.from || at > view.to || at >= next) continue
      if (ticks.length > 0 && at <= ticks[ticks.length - 1]!.at) continue
      const atMidnight = local === 0
      const text = atMidnight ? clock.day(at) : step < MINUTE ? clock.exactMoment(at).split(', ')[1]! : clock.time(at)
      ticks.push({ at, text, day: atMidnight })
    }
  }
  return ticks
}
