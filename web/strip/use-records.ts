import type { SwitchingOut, TripOut } from '../../core/contract/records.ts'
import { everyPage } from '../api/every-page.ts'
import { apiPath } from '../api/paths.ts'
import { type Fetched, useFetched } from '../api/use-fetched.ts'
import type { WrittenChange } from './state-spans.ts'
import type { View } from './view.ts'

export interface Records {
  /** Written changes by subject, from the beginning of the site: a state holds until the next change. */
  readonly changes: ReadonlyMap<string, readonly WrittenChange[]>
  /** When the device stood open, as far as somebody wrote down when it was restored. */
  readonly open: readonly View[]
  readonly cut: boolean
}

/** Switchings of the site and outages of one device. */
export function useRecords(site: string, rcd: string, to: number, version: number): Fetched<Records> {
  return useFetched(`${site} ${rcd}`, version, async (signal) => {
    const until = { to: new Date(to).toISOString(), limit: 1000 }
    const [switchings, trips] = await Promise.all([
      everyPage<SwitchingOut>(apiPath(['sites', site, 'switchings'], until), signal),
      everyPage<TripOut>(apiPath(['sites', site, 'trips'], until), signal),
    ])
    const changes = new Map<string, WrittenChange[]>()
    for (const { of, at, on } of switchings.items) {
      const list = changes.get(of) ?? []
      list.push({ at: Date.parse(at), on })
      changes.set(of, list)
    }
    const open = trips.items.flatMap((trip) => {
      const begun = trip.at ?? trip.before
      if (trip.rcd !== rcd || begun === undefined || trip.restoredAt === undefined) return []
      return [{ from: Date.parse(begun), to: Date.parse(trip.restoredAt) }]
    })
    return { changes, open, cut: switchings.cut || trips.cut }
  })
}
