import { type LocalClock, WEEKDAYS, type Weekday } from '../timeline/local-clock.ts'
import { eachSpan, type Spans, spansOf } from '../timeline/spans.ts'
import { darkHours } from './daylight.ts'
import type { Draws } from './draws.ts'

const MINUTE = 60_000
const HOUR = 3_600_000

/** When somebody or something wants a load on. */
export type Habit =
  | { readonly kind: 'always' }
  | { readonly kind: 'never' }
  /** Used by people: a Poisson process whose rate follows the hour of day; runs of log-normal length. */
  | {
      readonly kind: 'runs'
      readonly perDay: number
      /** 24 weights, local hours; only their ratios count. */
      readonly profile: readonly number[]
      readonly minutes: number
      /** Deviation of the logarithm of the length. */
      readonly spread: number
      /** Saturdays and Sundays, as a multiple of `perDay`. */
      readonly weekend?: number
    }
  /** A thermostat. */
  | { readonly kind: 'cycle'; readonly onMinutes: number; readonly offMinutes: number; readonly spread: number }
  /** A timer that counts hours of its own, as a defrost does; it stands still without supply. */
  | {
      readonly kind: 'every'
      readonly hours: number
      readonly minutes: number
      /** Spread of the length, minutes. */
      readonly jitter: number
      /** Hours from the start to the first run. */
      readonly first: number
    }
  /** A time switch: local minutes of the day. */
  | {
      readonly kind: 'clock'
      readonly windows: readonly (readonly [number, number])[]
      readonly days?: readonly Weekday[]
      /** Spread of its edges, minutes. */
      readonly jitter: number
    }
  /** A photocell that switches at an elevation of the sun, degrees; `until` (local minute) puts it out before dawn. */
  | { readonly kind: 'dusk'; readonly degrees: number; readonly until?: number }
  /** Known from elsewhere. */
  | { readonly kind: 'given'; readonly spans: Spans }

/** Where and when a habit is lived. */
export interface Setting {
  readonly from: number
  readonly to: number
  readonly clock: LocalClock
  readonly latitude: number
  readonly longitude: number
}

/** The times in [from, to) at which a habit wants its load on. */
export function runsOf(habit: Habit, setting: Setting, random: Draws): Spans {
  const { from, to, clock } = setting
  switch (habit.kind) {
    case 'always':
      return spansOf([[from, to]])
    case 'never':
      return spansOf([])
    case 'given':
      return habit.spans
    case 'runs':
      return spansOf(runs(habit, setting, random))
    case 'cycle': {
      const pairs: [number, number][] = []
      let t = from - random.uniform() * (habit.onMinutes + habit.offMinutes) * MINUTE
      while (t < to) {
        const end = t + random.logNormal(habit.onMinutes, habit.spread) * MINUTE
        pairs.push([t, end])
        t = end + Math.max(1, random.logNormal(habit.offMinutes, habit.spread)) * MINUTE
      }
      return spansOf(pairs)
    }
    case 'every': {
      const pairs: [number, number][] = []
      for (let t = from + habit.first * HOUR; t < to; t += habit.hours * HOUR) {
        pairs.push([t, t + Math.max(1, random.normal(habit.minutes, habit.jitter)) * MINUTE])
      }
      return spansOf(pairs)
    }
    case 'clock': {
      const pairs: [number, number][] = []
      for (const [start, end] of habit.windows) {
        for (const span of eachSpan(clock.dailySpans(from, to, start, end, habit.days ?? WEEKDAYS))) {
          const move = (): number => random.normal(0, habit.jitter) * MINUTE
          pairs.push([span.from + move(), span.to + move()])
        }
      }
      return spansOf(pairs)
    }
    case 'dusk':
      return spansOf(
        darkHours(from, to, setting.latitude, setting.longitude, habit.degrees).map(([dusk, dawn]) => [
          dusk,
          Math.min(dawn, habit.until === undefined ? dawn : nextLocal(dusk, habit.until, clock)),
        ]),
      )
    default:
      return habit satisfies never
  }
}

function runs(habit: Habit & { kind: 'runs' }, setting: Setting, random: Draws): [number, number][] {
  const { from, to, clock } = setting
  const sum = habit.profile.reduce((a, w) => a + w, 0)
  const pairs: [number, number][] = []
  // Thinning (Lewis & Shedler 1979): candidates at the greatest rate, kept by the rate of their hour.
  const weekend = habit.weekend ?? 1
  const most = (Math.max(...habit.profile) / sum) * habit.perDay * Math.max(1, weekend)
  for (let t = from + random.exponential(HOUR / most); t < to; t += random.exponential(HOUR / most)) {
    const day = clock.weekday(t)
    const factor = day === 'sat' || day === 'sun' ? weekend : 1
    const rate = (habit.profile[Math.floor(clock.minuteOfDay(t) / 60)]! / sum) * habit.perDay * factor
    const length = random.logNormal(habit.minutes, habit.spread) * MINUTE
    if (random.chance(rate / most)) pairs.push([t, t + length])
  }
  return pairs
}

/** The first instant after `t` at which the wall clock shows this minute. */
export function nextLocal(t: number, minute: number, clock: LocalClock): number {
  const ahead = (minute - clock.minuteOfDay(t) + 1440) % 1440
  return t + (ahead === 0 ? 1440 : ahead) * MINUTE
}
