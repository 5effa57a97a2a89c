import type { TimedStep } from '../contract/findings.ts'
import { quantile } from '../statistics/quantile.ts'
import { localClock } from '../timeline/local-clock.ts'
import { eachSpan } from '../timeline/spans.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { energisedClock } from './energised-clock.ts'
import type { Unexplained } from './unexplained.ts'
import { clockText } from './windows/clock-windows.ts'
import { current, figure, rounded } from './words.ts'

const MINUTE_MS = 60_000
const HOUR_MS = 60 * MINUTE_MS
const DAY_MINUTES = 1_440
/** Fewer steps than this show no schedule. */
const LEAST_STEPS = 5
/** Steps begin within so many minutes of the same clock time … */
const CLOCK_WIDTH = 20
/** … and so large a share of them does. */
const CLOCK_SHARE = 0.7
/** Mean resultant length of the phases of a period. */
const SHARP = 0.85
/** Chance of the same from steps at random times, after paying for all that was tried. */
const LEAST_P = 1e-4

/** When the steps that nobody named come. */
export type Schedule =
  | { readonly kind: 'clock'; readonly minute: number }
  | { readonly kind: 'period'; readonly hours: number }
  | { readonly kind: 'none' }

/**
 * The schedule behind excursions that no named load accounts for: a fixed clock time (the fullest window of the local
 * day, its binomial tail paid for by the number of windows: Naus 1965 in spirit), else a fixed period (Rayleigh
 * periodogram of their starts, on the wall's clock and on one that stands still while the device is open, paid for by the number of frequencies: Mardia & Jupp 2000, §6.3).
 */
export function scheduleOf(timeline: Timeline, found: Unexplained): Schedule {
  const starts = [...eachSpan(found.excursions)].map((s) => s.from)
  if (starts.length < LEAST_STEPS) return { kind: 'none' }
  return clockOf(timeline, starts) ?? periodOf(timeline, starts) ?? { kind: 'none' }
}

function clockOf(timeline: Timeline, starts: readonly number[]): Schedule | null {
  const clock = localClock(timeline.sheet.timeZone)
  const minutes = starts.map((t) => clock.minuteOfDay(t)).sort((a, b) => a - b)
  let most = 0
  let at = 0
  for (const first of minutes) {
    const inside = minutes.filter((m) => (m - first + DAY_MINUTES) % DAY_MINUTES <= CLOCK_WIDTH)
    if (inside.length > most) {
      most = inside.length
      at =
        first +
        quantile(
          inside.map((m) => (m - first + DAY_MINUTES) % DAY_MINUTES),
          0.5,
        )
    }
  }
  const n = starts.length
  // Chernoff's bound of the binomial tail: never smaller than the tail itself
  const share = most / n
  const chance = CLOCK_WIDTH / DAY_MINUTES
  const rest = share < 1 ? (1 - share) * Math.log((1 - share) / (1 - chance)) : 0
  const p = (DAY_MINUTES / CLOCK_WIDTH) * 2 * Math.exp(-n * (share * Math.log(share / chance) + rest))
  return share >= CLOCK_SHARE && p <= LEAST_P ? { kind: 'clock', minute: at % DAY_MINUTES } : null
}

function periodOf(timeline: Timeline, starts: readonly number[]): Schedule | null {
  const span = (timeline.to - timeline.from) / HOUR_MS
  const onWall = starts.map((t) => (t - timeline.from) / HOUR_MS)
  const step = 0.1 / span
  let best = { length: 0, frequency: 0 }
  let tried = 0
  for (const at of [onWall, starts.map(energisedClock(timeline))]) {
    for (let frequency = Math.max(4 / span, 1 / 240); frequency <= 1; frequency += step) {
      tried++
      let cos = 0
      let sin = 0
      for (const t of at) {
        cos += Math.cos(2 * Math.PI * frequency * t)
        sin += Math.sin(2 * Math.PI * frequency * t)
      }
      const length = Math.hypot(cos, sin) / at.length
      // of harmonics that fit as well the longest period is the plain one
      if (length > best.length + 0.01) best = { length, frequency }
    }
  }
  const p = tried * Math.exp(-starts.length * best.length ** 2)
  return best.length >= SHARP && p <= LEAST_P ? { kind: 'period', hours: 1 / best.frequency } : null
}

/** The steps of one schedule in figures and words; empty without a schedule. */
export function timedSteps(found: Unexplained | null, schedule: Schedule): TimedStep[] {
  if (found === null) return []
  if (schedule.kind === 'none') return []
  const spans = [...eachSpan(found.excursions)]
  const minutes = quantile(
    spans.map((s) => (s.to - s.from) / MINUTE_MS),
    0.5,
  )
  const about = `About ${current(found.heightMa)} mA for ${Math.round(minutes)} minutes`
  const common = { ma: rounded(found.heightMa), minutes: rounded(minutes), count: spans.length }
  if (schedule.kind === 'clock') {
    const localTime = clockText(schedule.minute)
    const text = `${about}, ${spans.length} times, round ${localTime}, on no listed load.`
    return [{ ...common, schedule: 'clock', localTime, text }]
  }
  const text = `${about}, ${spans.length} times, every ${figure(schedule.hours)} h, on no listed load.`
  return [{ ...common, schedule: 'period', hours: rounded(schedule.hours), text }]
}
