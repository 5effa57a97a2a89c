import type { Channel, RecordKind, SiteSheet, Trip } from '../../core/contract/index.ts'
import type { Evidence, Kept } from '../../core/timeline/evidence.ts'
import { joinSeries, type Series } from '../../core/timeline/series.ts'
import type { ChannelExtent, SiteRecord, StoredRecord, StoreReader } from '../store/port.ts'
import { MAX_READINGS_LOADED, MAX_SPAN_MS, TooMuch } from './limits.ts'

const PAGE = 1_000
const HOUR_MS = 3_600_000

/** What findings are asked of: a device of a site, over a span whose ends may be left to the data. */
export interface Question {
  readonly site: SiteRecord
  readonly rcd: string
  readonly from: number | null
  readonly to: number | null
}

/**
 * All that is known of a device over a span, as findings take it. Ends that were left open follow from the data, never from the clock: from the first
 * reading or trip until just after the last reading or record.
 * @throws {TooMuch} when the span is too long or holds more readings than one analysis may load
 */
export async function loadEvidence(reader: StoreReader, { site, rcd, from, to }: Question): Promise<Evidence> {
  const [trips, switchings, timetables, tests, remedies, extents] = await Promise.all([
    all(reader, site.id, 'trip'),
    all(reader, site.id, 'switching'),
    all(reader, site.id, 'timetable'),
    all(reader, site.id, 'test'),
    all(reader, site.id, 'remedy'),
    reader.extents(site.id),
  ])
  const ends = spanOf(
    extents,
    trips,
    [...switchings, ...tests, ...remedies].map(({ at }) => at),
    site.createdAt,
  )
  const until = to ?? (from === null ? ends.to : Math.max(ends.to, from + HOUR_MS))
  const since = from ?? Math.max(Math.min(ends.from, until - HOUR_MS), until - MAX_SPAN_MS)
  if (until - since > MAX_SPAN_MS) throw new TooMuch('The span is longer than ten years; ask for less.')
  const series = await loadSeries(reader, site, rcd, extents, since, until)
  return { sheet: site.sheet, rcd, from: since, to: until, series, trips, switchings, timetables, tests, remedies }
}

async function all<K extends RecordKind>(
  reader: StoreReader,
  site: string,
  kind: K,
): Promise<Kept<StoredRecord<K>['body']>[]> {
  const kept: Kept<StoredRecord<K>['body']>[] = []
  let after: string | undefined
  do {
    const page = await reader.records(site, kind, { after, limit: PAGE })
    for (const { id, body } of page.items) kept.push({ ...body, id })
    after = page.next ?? undefined
  } while (after !== undefined)
  return kept
}

function spanOf(
  extents: readonly ChannelExtent[],
  trips: readonly Trip[],
  others: readonly number[],
  createdAt: number,
): { readonly from: number; readonly to: number } {
  const tripTimes = trips.flatMap((trip) => [trip.at, trip.after, trip.before, trip.restoredAt]).filter(isNumber)
  const watched = [...extents.flatMap(({ first, last }) => [first, last]), ...tripTimes]
  const from = least(watched.length > 0 ? watched : others)
  const to = greatest([...watched, ...others])
  if (from === undefined || to === undefined) return { from: createdAt - HOUR_MS, to: createdAt }
  // Half-open, and on a whole second, so that the last reading lies inside.
  return { from, to: Math.floor(to / 1_000) * 1_000 + 1_000 }
}

function isNumber(value: number | undefined): value is number {
  return value !== undefined
}

function least(values: readonly number[]): number | undefined {
  return values.length === 0 ? undefined : values.reduce((a, b) => Math.min(a, b))
}

function greatest(values: readonly number[]): number | undefined {
  return values.length === 0 ? undefined : values.reduce((a, b) => Math.max(a, b))
}

async function loadSeries(
  reader: StoreReader,
  site: SiteRecord,
  rcd: string,
  extents: readonly ChannelExtent[],
  from: number,
  to: number,
): Promise<ReadonlyMap<string, Series>> {
  const held = new Set(extents.map(({ channel }) => channel))
  const series = new Map<string, Series>()
  let room = MAX_READINGS_LOADED
  for (const { ref } of channelsOf(site.sheet, rcd)) {
    if (!held.has(ref)) continue
    const pieces: Series[] = []
    for await (const piece of reader.readingPieces(site.id, ref, from, to)) {
      room -= piece.t.length
      if (room < 0) {
        throw new TooMuch(`The span holds more than ${MAX_READINGS_LOADED} readings; ask for a shorter one.`)
      }
      pieces.push(piece)
    }
    if (pieces.length > 0) series.set(ref, joinSeries(pieces))
  }
  return series
}

/** The channels that say something about a device: its own, those of its circuits and loads, and those of the site. */
function channelsOf(sheet: SiteSheet, rcd: string): Channel[] {
  const circuits = sheet.rcds.find(({ ref }) => ref === rcd)?.circuits ?? []
  const circuitRefs = new Set(circuits.map(({ ref }) => ref))
  const loadRefs = new Set(circuits.flatMap(({ loads }) => loads.map(({ ref }) => ref)))
  return sheet.channels.filter((channel) => {
    if (channel.rcd !== undefined) return channel.rcd === rcd
    if (channel.circuit !== undefined) return circuitRefs.has(channel.circuit)
    if (channel.load !== undefined) return loadRefs.has(channel.load)
    return true
  })
}
