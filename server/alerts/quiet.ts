import type { AlertSettings } from '../../core/contract/index.ts'
import { localClock } from '../../core/timeline/local-clock.ts'

/** Whether the clock on the wall of a site is within its quiet hours. */
export function isQuiet(quiet: AlertSettings['quiet'], zone: string, now: number): boolean {
  if (quiet === null) return false
  const minute = localClock(zone).minuteOfDay(now)
  const from = minutesOf(quiet.from)
  const to = minutesOf(quiet.to)
  return from <= to ? minute >= from && minute < to : minute >= from || minute < to
}

function minutesOf(time: string): number {
  const [hours, minutes] = time.split(':').map(Number) as [number, number]
  return 60 * hours + minutes
}
