import type { Remedy, SiteTest, Switching, Timetable, Trip } from '../contract/records.ts'
import type { SiteSheet } from '../contract/site-sheet.ts'
import type { Series } from './series.ts'

/** A stored record with its id. */
export type Kept<T> = T & { readonly id: string }

/**
 * All that is known of a site in [from, to), as `buildTimeline` and `findings` take it: plain data, so that it crosses a worker's border
 * and makes a test by hand. Records are in order of time. Times are epoch ms.
 */
export interface Evidence {
  readonly sheet: SiteSheet
  /** The device asked about. */
  readonly rcd: string
  readonly from: number
  readonly to: number
  /** By channel reference; a channel without readings is absent. */
  readonly series: ReadonlyMap<string, Series>
  /** Of every device of the site: trips of the others tell shared ones. */
  readonly trips: readonly Kept<Trip>[]
  /** From the beginning of time: the state at `from` follows from earlier changes. */
  readonly switchings: readonly Kept<Switching>[]
  readonly timetables: readonly Kept<Timetable>[]
  readonly tests: readonly Kept<SiteTest>[]
  readonly remedies: readonly Kept<Remedy>[]
}
