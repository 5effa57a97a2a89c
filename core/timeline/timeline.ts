import type { Remedy, SiteTest } from '../contract/records.ts'
import type { Circuit, Rcd, SiteSheet } from '../contract/site-sheet.ts'
import type { Kept } from './evidence.ts'
import type { Exposure } from './exposure.ts'
import type { Series } from './series.ts'
import type { Spans } from './spans.ts'

/** A trip of a device: an instant (`from === to`) or somewhere in [from, to]. */
export interface TimelineTrip {
  /** Of the stored trip; null for one that the log shows and nobody wrote down. */
  readonly id: string | null
  readonly rcd: string
  readonly from: number
  readonly to: number
  /** True when the log narrowed an interval that was written down wider. */
  readonly narrowed: boolean
  readonly restoredAt: number | null
  /** What was running, as the person noticed: `circuit:REF`, `load:REF`. */
  readonly running: readonly string[]
}

/** One change of state of a circuit or load. */
export interface Change {
  readonly at: number
  readonly on: boolean
}

/** A circuit or load of the device: what can be on, off, or a suspect. */
export interface Thing {
  /** `circuit:REF` or `load:REF`. */
  readonly of: string
  readonly kind: 'circuit' | 'load'
  readonly ref: string
  readonly label: string
  /** The circuit it is, or hangs on. */
  readonly circuit: string
  /** What its own switching opens: a circuit by its device, a load by unplugging or its own switch. */
  readonly isolation: Circuit['isolation']
  /** Within energised time: on, off, unknown. A load on a circuit that is off is off. */
  readonly state: Exposure
  /** Changes of state while energised, in order of time; the device's own opening and closing is none. */
  readonly changes: readonly Change[]
  /** Where the state comes from, most exact first. */
  readonly source: 'running' | 'load-current' | 'switching' | 'timetable' | 'assumed'
  /** A change may have stood so long before the state's channel read it, ms; null when changes are told as they come. */
  readonly readEveryMs: number | null
  /** Its own leakage channel, when it has one. */
  readonly leakage: Series | null
}

/**
 * Everything the findings of one device work on, built once from the evidence: energised time, states, trips and
 * columns. Times are epoch ms; all spans lie within [from, to).
 */
export interface Timeline {
  readonly sheet: SiteSheet
  readonly rcd: Rcd
  readonly from: number
  readonly to: number
  /** Time with the device closed and the supply there; nothing is at risk outside it. */
  readonly energised: Spans
  /** Residual current of the whole group, mA: r.m.s., or the phasor sum of its components; null when not logged. */
  readonly leakage: Series | null
  readonly conductive: Series | null
  readonly capacitive: Series | null
  /** Energised time in which `leakage` has readings closer than its gap limit. */
  readonly logged: Spans
  /** Gaps of every channel that has readings. */
  readonly gaps: readonly { readonly channel: string; readonly from: number; readonly to: number }[]
  /** Circuits of the device in the order of the sheet, each followed by its loads. */
  readonly things: readonly Thing[]
  /** Of this device within [from, to), by time. Written down, or proposed by the log (`id` null). */
  readonly trips: readonly TimelineTrip[]
  /** Of the site's other devices: written down, or falls of their logs that nobody wrote down (`id` null). */
  readonly otherTrips: readonly TimelineTrip[]
  readonly rain: Series | null
  readonly temperature: Series | null
  readonly humidity: Series | null
  /** Load current of the whole group, A. */
  readonly loadCurrent: Series | null
  readonly voltage: Series | null
  readonly tests: readonly Kept<SiteTest>[]
  readonly remedies: readonly Kept<Remedy>[]
  /** What was merged, narrowed or set aside, in words. */
  readonly notes: readonly string[]
}
