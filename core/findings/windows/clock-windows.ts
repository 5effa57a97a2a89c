import { localClock } from '../../timeline/local-clock.ts'
import type { ExposureWindow } from '../line-up.ts'
import { type Frame, HOUR_MS, MINUTE_MS } from './trip-share.ts'

const DAY_MINUTES = 1_440
/** Widths of a daily window that are tried, minutes, and how many of them go round the clock. */
const WIDTHS = [10, 20, 40, 90, 180] as const

/** Energised time by local minute of the day, h, and each trip's share in it. */
interface DayProfile {
  readonly hours: Float64Array
  readonly trips: readonly Float64Array[]
}

/**
 * The same clock time every day: windows of several widths round the clock, each overlapping the next by half.
 * All of them together share one suspect's prior, so that trying many is paid for (Naus 1965 in spirit; here by
 * averaging instead of a corrected p-value).
 */
export function clockWindows(frame: Frame): ExposureWindow[] {
  const profile = dayProfile(frame)
  const hours = running(profile.hours)
  const lively = frame.habits.map((habit) => running(profile.hours.map((h, minute) => h * habit.at(minute))))
  const trips = profile.trips.map(running)
  const wall = localClock(frame.timeline.sheet.timeZone)
  const days = frame.trips.map(({ from }) => wall.dayNumber(from))
  const windows: ExposureWindow[] = []
  for (const width of WIDTHS) {
    const step = width / 2
    const count = DAY_MINUTES / step
    for (let k = 0; k < count; k++) {
      const start = k * step
      const exposed = between(hours, start, start + width)
      if (exposed <= 0.05) continue
      const inside = Float64Array.from(trips, (t) => between(t, start, start + width))
      // several trips of one day are a burst, not a clock time
      if (inside.filter((x) => x > 0.5).length >= 2 && new Set(days.filter((_, i) => inside[i]! > 0.5)).size < 2)
        continue
      windows.push({
        key: `${clockText(start)}+${width}`,
        words: `between ${clockText(start)} and ${clockText(start + width)}`,
        prior: 1 / (WIDTHS.length * count),
        hoursBy: lively.map((sums) => between(sums, start, start + width)),
        insideHours: exposed,
        inside,
        weightsBy: frame.habits.map(() => inside),
      })
    }
  }
  return windows
}

/** Whole multiples of a day, and a day in up to so many equal parts, belong to the clock on the wall. */
const PARTS_OF_A_DAY = 6

/** Whether a period cannot be told from a clock time (or a few of them) over a span. */
export function isDaily(hours: number, spanHours: number): boolean {
  const ratio = hours >= 24 ? hours / 24 : 24 / hours
  const whole = Math.round(ratio)
  if (hours < 24 && whole > PARTS_OF_A_DAY) return false
  // a phase that drifts by less than a quarter over the span looks fixed
  const slack = Math.max(0.005, hours / spanHours / 4)
  return Math.abs(ratio - whole) < slack * whole
}

function dayProfile(frame: Frame): DayProfile {
  const { timeline } = frame
  const clock = localClock(timeline.sheet.timeZone)
  const hours = new Float64Array(DAY_MINUTES)
  for (let i = 0; i < timeline.energised.length; i += 2) {
    spread(hours, clock.minuteOfDay, timeline.energised[i]!, timeline.energised[i + 1]!, 1 / HOUR_MS)
  }
  const trips = frame.trips.map(({ from, to }) => {
    const share = new Float64Array(DAY_MINUTES)
    if (to - from < MINUTE_MS) share[Math.floor(clock.minuteOfDay(from)) % DAY_MINUTES] = 1
    else spread(share, clock.minuteOfDay, from, to, 1 / (to - from))
    return share
  })
  return { hours, trips }
}

/** Adds the time of [from, to), times `scale`, to the minutes of the day it falls in. */
function spread(
  into: Float64Array,
  minuteOfDay: (ms: number) => number,
  from: number,
  to: number,
  scale: number,
): void {
  let at = from
  while (at < to) {
    const minute = minuteOfDay(at)
    const whole = Math.floor(minute)
    // within a quarter of an hour no zone changes its offset: walk minute by minute, ask the clock again then
    const stop = Math.min(to, (Math.floor(at / (15 * MINUTE_MS)) + 1) * 15 * MINUTE_MS)
    let m = whole
    let edge = at + (whole + 1 - minute) * MINUTE_MS
    while (at < stop) {
      const next = Math.min(stop, edge)
      into[m % DAY_MINUTES]! += (next - at) * scale
      at = next
      edge += MINUTE_MS
      m++
    }
  }
}

/** Running sums over two days, so that windows may pass midnight. */
function running(minutes: Float64Array): Float64Array {
  const sums = new Float64Array(2 * DAY_MINUTES + 1)
  for (let i = 0; i < 2 * DAY_MINUTES; i++) sums[i + 1] = sums[i]! + minutes[i % DAY_MINUTES]!
  return sums
}

function between(sums: Float64Array, from: number, to: number): number {
  return sums[to]! - sums[from]!
}

/** Minutes of the day as HH:MM. */
export function clockText(minutes: number): string {
  const m = Math.round(minutes) % DAY_MINUTES
  return `${String(Math.floor(m / 60)).padStart(2, '0')}:${String(m % 60).padStart(2, '0')}`
}
