import { type Trip, writeInstant } from '../../core/contract/index.ts'
import type { StoredRecord } from '../store/port.ts'

/** When a device was certainly open: from the trip at the latest until the supply came back; undefined when unknown. */
function outage(trip: Trip): { readonly from: number; readonly to: number } | undefined {
  const from = trip.at ?? trip.before
  if (from === undefined) return undefined
  return { from, to: trip.restoredAt ?? from }
}

/** The span of all outages in a list, to ask for what may overlap them; null when there is none. */
export function outagesSpan(trips: readonly Trip[]): { readonly from: number; readonly to: number } | null {
  const outages = trips.flatMap((trip) => outage(trip) ?? [])
  if (outages.length === 0) return null
  return {
    from: outages.reduce((least, { from }) => Math.min(least, from), Number.POSITIVE_INFINITY),
    to: outages.reduce((greatest, { to }) => Math.max(greatest, to), Number.NEGATIVE_INFINITY) + 1,
  }
}

/**
 * Names each outage of a device that begins while an earlier one of the same device lasts. Both are kept; findings
 * take them as one. `ids` are those that were just posted; only overlaps with them are told, at most 20.
 */
export function overlapNotes(stored: readonly StoredRecord<'trip'>[], ids: ReadonlySet<string>): string[] {
  const notes: string[] = []
  const lasting = new Map<string, { readonly id: string; readonly from: number; readonly to: number }>()
  const all = stored
    .flatMap(({ id, body }) => {
      const span = outage(body)
      return span === undefined ? [] : [{ id, rcd: body.rcd, ...span }]
    })
    .sort((a, b) => a.from - b.from || b.to - a.to || (a.id < b.id ? -1 : 1))
  for (const one of all) {
    const before = lasting.get(one.rcd)
    if (before !== undefined && one.from < before.to && (ids.has(one.id) || ids.has(before.id))) {
      notes.push(
        `Outages of ${one.rcd} overlap: ${one.id} (from ${writeInstant(one.from)}) begins while ${before.id} ` +
          `(${writeInstant(before.from)} to ${writeInstant(before.to)}) lasts. Both are kept; findings take them as one.`,
      )
      if (notes.length === 20) return notes
    }
    if (before === undefined || one.to > before.to) lasting.set(one.rcd, one)
  }
  return notes
}
