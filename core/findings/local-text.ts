import { type LocalClock, localClock } from '../timeline/local-clock.ts'
import { clockText } from './windows/clock-windows.ts'

const MONTHS = ['Jan', 'Feb', 'Mar', 'Apr', 'May', 'Jun', 'Jul', 'Aug', 'Sep', 'Oct', 'Nov', 'Dec'] as const
const DAY_MS = 86_400_000
const INSTANT = /\d{4}-\d{2}-\d{2}T\d{2}:\d{2}:\d{2}(?:\.\d+)?Z/g

/** An instant on the site's clock, for sentences: `20 Nov 06:09:55`. */
export function localText(clock: LocalClock, ms: number): string {
  const date = new Date(clock.dayNumber(ms) * DAY_MS)
  const seconds = String(Math.floor(ms / 1_000) % 60).padStart(2, '0')
  return `${date.getUTCDate()} ${MONTHS[date.getUTCMonth()]} ${clockText(Math.floor(clock.minuteOfDay(ms)))}:${seconds}`
}

/** A text with every RFC 3339 instant in it written on the clock of the zone. */
export function withLocalTimes(text: string, zone: string): string {
  const clock = localClock(zone)
  return text.replace(INSTANT, (instant) => localText(clock, Date.parse(instant)))
}
