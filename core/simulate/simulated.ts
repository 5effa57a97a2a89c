import type { Remedy, SiteTest, Switching, Timetable, Trip } from '../contract/records.ts'
import type { SiteSheet } from '../contract/site-sheet.ts'
import type { Evidence, Kept } from '../timeline/evidence.ts'
import { type Series, sliceSeries } from '../timeline/series.ts'
import type { TrueTrip } from './device-run.ts'
import type { TrueLine } from './true-budget.ts'

/** What nobody on site knows. */
export interface Truth {
  /** The device that trips. */
  readonly rcd: string
  /** The kind of scenario. */
  readonly kind: string
  /** What makes it trip, as suspects are written. */
  readonly causes: readonly string[]
  /** First suspects that count as right; more than `causes` where the data cannot tell more. */
  readonly answers: readonly string[]
  readonly trips: readonly TrueTrip[]
  /** What each circuit and load really adds, by reference; empty without a logger. */
  readonly budget: ReadonlyMap<string, TrueLine>
}

/** A simulated site: what is posted, and the truth behind it. */
export interface Simulated {
  readonly sheet: SiteSheet
  readonly from: number
  readonly to: number
  readonly series: ReadonlyMap<string, Series>
  readonly trips: readonly Trip[]
  readonly switchings: readonly Switching[]
  readonly timetables: readonly Timetable[]
  readonly tests: readonly SiteTest[]
  readonly remedies: readonly Remedy[]
  readonly truth: Truth
}

/** The evidence about one device, as it would come out of the store. */
export function evidenceOf(
  simulated: Simulated,
  rcd: string = simulated.truth.rcd,
  from: number = simulated.from,
  to: number = simulated.to,
): Evidence {
  const start = (trip: Trip): number => trip.at ?? trip.after ?? 0
  const end = (trip: Trip): number => trip.restoredAt ?? trip.at ?? trip.before ?? 0
  const series = new Map<string, Series>()
  for (const [ref, whole] of simulated.series) {
    const part = sliceSeries(whole, from, to)
    if (part.t.length > 0) series.set(ref, part)
  }
  return {
    sheet: simulated.sheet,
    rcd,
    from,
    to,
    series,
    trips: kept(
      'trip',
      simulated.trips.filter((trip) => start(trip) < to && end(trip) >= from),
      start,
    ),
    switchings: kept('switching', simulated.switchings, (switching) => switching.at),
    timetables: kept('timetable', simulated.timetables, (timetable) => timetable.from ?? 0),
    tests: kept('test', simulated.tests, (test) => test.at),
    remedies: kept('remedy', simulated.remedies, (remedy) => remedy.at),
  }
}

function kept<T extends object>(kind: string, bodies: readonly T[], time: (body: T) => number): Kept<T>[] {
  return [...bodies]
    .sort((a, b) => time(a) - time(b))
    .map((body, i) => ({ ...body, id: `${kind}-${String(i + 1).padStart(4, '0')}` }))
}
