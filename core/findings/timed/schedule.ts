import type { Weekday } from '../../timeline/local-clock.ts'

/** When a load that nobody named runs. Starts only; how long it runs is the cluster's `minutes`. */
export type TimedSchedule = ClockSchedule | PeriodSchedule | SunSchedule

interface Fit {
  /** Nine of ten starts lie within so many minutes of the schedule. */
  readonly spreadMinutes: number
  /** Share of the starts due, while the log looked, that came. */
  readonly kept: number
  /** Chance of such a gathering among steps at random times, all that was tried paid for. */
  readonly p: number
}

/** One or more fixed times on the clock on the wall. */
export interface ClockSchedule extends Fit {
  readonly kind: 'clock'
  /** Minutes since local midnight, ascending. */
  readonly minutes: readonly number[]
  /** All seven, or the days on which it runs. */
  readonly days: readonly Weekday[]
  /** Set where the span is too short to tell it from an offset to the sun: how far that event moved over the starts, minutes. */
  readonly sunMoved?: number
}

/** Every so many hours. */
export interface PeriodSchedule extends Fit {
  readonly kind: 'period'
  readonly hours: number
  /** `supply`: a timer that stands still while the device is open. */
  readonly on: 'wall' | 'supply'
  /** Hours from the beginning of the span, on that clock, to a start (of the last stretch, where it began anew). */
  readonly phaseHours: number
  /** Where its count began anew, as after a cut of supply that nobody noted: hours of the first start of each stretch. */
  readonly begunAnew?: readonly number[]
}

/** A fixed time from sunset or sunrise. */
export interface SunSchedule extends Fit {
  readonly kind: 'sun'
  readonly event: 'sunset' | 'sunrise'
  /** Minutes after the event; negative before it. */
  readonly offsetMinutes: number
}
