import type { Circuit } from '../contract/site-sheet.ts'
import type { Habit } from './habit.ts'
import type { Phasor } from './phasor.ts'
import type { Climate, Damping, Weather } from './weather.ts'

/** How a load's insulation fails, with what it adds to the conductive leakage, mA. */
export type LoadFault =
  /** Leaks the whole time that it is on; each run its own strength. */
  | { readonly kind: 'when-on'; readonly mA: number; readonly spread: number }
  /** Leaks for seconds at random moments within a run. */
  | {
      readonly kind: 'in-run'
      readonly perHour: number
      readonly mA: number
      readonly spread: number
      readonly seconds: number
    }
  /** A damp element: its leakage climbs as it warms, and falls as the heat dries it. */
  | {
      readonly kind: 'warming'
      readonly mA: number
      readonly spread: number
      readonly riseMinutes: number
      readonly dryMinutes: number
      /** How long it must stand to be as damp again (63 %). */
      readonly dampHours: number
    }

/** A load as it really is; the sheet may know less. */
export interface LoadPlan {
  readonly ref: string
  readonly label?: string
  readonly habit: Habit
  /** Load current while on, A. */
  readonly amps: number
  /** Leakage while on: filters behind the switch, the element. */
  readonly on: Phasor
  /** Leakage while plugged in and off: filters in front of the switch. */
  readonly idle: Phasor
  /** Time constant with which `on` comes and goes, seconds; at once when left out. */
  readonly settleSeconds?: number
  /** Whether it goes on by itself after an outage; a run that does not is over. */
  readonly resumes: boolean
  /** Whether the sheet names it. */
  readonly listed: boolean
  /** Whether a channel says when it runs. */
  readonly monitored: boolean
  readonly fault?: LoadFault
}

/** A circuit as it really is. */
export interface CircuitPlan {
  readonly ref: string
  readonly label?: string
  readonly device?: string
  readonly isolation: Circuit['isolation']
  /** Cable and fixed filters. */
  readonly standing: Phasor
  /** Share of what leaks here that stays when only the line is opened. */
  readonly neutralShare: number
  /** Conductive leakage by damp, mA at full wetness. */
  readonly damp?: Damping & { readonly mA: number }
  readonly loads: readonly LoadPlan[]
}

/** A residual current device and what hangs on it. */
export interface RcdPlan {
  readonly ref: string
  readonly label?: string
  readonly ratedMa: number
  /** The residual current at which it really opens, mA. */
  readonly tripMa: number
  readonly circuits: readonly CircuitPlan[]
  /** Slow wandering of the whole group's capacitive leakage: deviation mA, time constant hours. */
  readonly drift: { readonly mA: number; readonly hours: number }
  /** Deviation of the residual within a second (mA): harmonics, switching, contact bounce. */
  readonly flickerMa: number
  /** Conductive leakage per ampere of the group's load current: neutral to earth, mA/A. */
  readonly neutralEarth?: number
  /** Transients that open this device alone, mean a week. */
  readonly surgesPerWeek: number
}

/** Somebody opens a breaker or unplugs a load for a time. */
export interface Isolating {
  readonly of: string
  readonly from: number
  readonly to: number
  /** Whether it is written down. */
  readonly told: boolean
}

/** What is true on site. */
export interface Installation {
  readonly name: string
  readonly timeZone: string
  readonly latitude: number
  readonly longitude: number
  readonly weather: Weather | Climate
  readonly rcds: readonly RcdPlan[]
  readonly isolating: readonly Isolating[]
  /** Transients that open every device at once, mean a week. */
  readonly sharedSurgesPerWeek: number
}

/** Who lives or works there, and how they deal with trips. */
export interface People {
  /** Local minutes of the day. */
  readonly up: number
  readonly down: number
  /** Mean time from a trip to its end while somebody is there, minutes. */
  readonly resetMinutes: number
  /** Share of trips by day whose time is known; of the others only an interval is. */
  readonly noticed: number
  /** Deviation of a noted time from the true one, seconds; always late. */
  readonly lateSeconds: number
  /** What they write down as running, when it runs. */
  readonly suspects: readonly string[]
  /** What they add when one of these ran. */
  readonly saying?: string
}

/** A clamp with a memory, and what else is recorded. */
export interface Logger {
  readonly intervalMs: number
  /** Another interval on some devices, by reference. */
  readonly intervalOf?: Readonly<Record<string, number>>
  readonly resolutionMa: number
  readonly accuracy: { readonly percent: number; readonly digits: number }
  readonly fullScaleMa: number
  /** Nothing is recorded within. */
  readonly gaps: readonly (readonly [number, number])[]
  /** What its clock shows less the true time: at the start, and gained a day. */
  readonly clockMs: number
  readonly clockMsPerDay: number
  /** How often states of loads and the load current are written, ms. */
  readonly statesMs: number
  /** Whether a state is also written as it changes. */
  readonly statesOnChange: boolean
  readonly loadCurrent: boolean
  readonly weather: boolean
}
