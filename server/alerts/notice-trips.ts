import type { SiteSheet, Trip } from '../../core/contract/index.ts'
import type { Notice, Noticed, OpenMatter } from './notice.ts'
import { localTime, rcdName } from './words.ts'

const HOUR = 3_600_000
/** A trip further back than this is history when it is written down. */
export const TRIP_TOLD_WITHIN_MS: number = 48 * HOUR
/** A logger's clock may be so far ahead. */
export const AHEAD_MS: number = 24 * HOUR
/** Two notes of one device so near each other are one trip that two people wrote down. */
const SAME_TRIP_MS = HOUR / 4
/** A trip without a word of the supply being back is no longer open after this. */
const OPEN_MS = 24 * HOUR

export interface TripNote {
  readonly id: string
  readonly recordedAt: number
  readonly body: Trip
}

/** A trip that the log shows and nobody wrote down. */
export interface TripInLog {
  readonly rcd: string
  readonly from: number
  readonly to: number
}

interface Outage {
  readonly rcd: string
  readonly from: number
  readonly to: number
  /** The supply was back at `to`: what comes later is another trip. */
  readonly restored: boolean
}

/**
 * Trips that came since the alerts were set up. Two notes of one trip, as of the logger and of the person who found it,
 * are one matter; so are a note and what the log shows of the trip.
 * @param matters open ones, and those of the last days
 */
export function noticeTrips(
  sheet: SiteSheet,
  trips: readonly TripNote[],
  since: number,
  matters: readonly OpenMatter[],
  now: number,
  inLog: readonly TripInLog[] = [],
): Noticed {
  const known = matters.flatMap((matter) => (matter.kind === 'trip' ? [outageIn(matter)] : []))
  const told = new Set(matters.map(({ key }) => key))
  const notices: Notice[] = trips.flatMap(({ id, recordedAt, body }) => {
    const outage = outageOf(body)
    const key = `trip/${id}`
    // A clock that was set back since then must not hide a trip.
    const old = recordedAt < since && since <= now
    if (outage === undefined || old || told.has(key) || outage.to < now - TRIP_TOLD_WITHIN_MS) return []
    if (outage.from > now + AHEAD_MS || known.some((one) => isSame(one, outage))) return []
    known.push(outage)
    return [{ key, kind: 'trip' as const, text: textOf(sheet, body), figures: { trip: id, ...outage } }]
  })
  for (const { rcd, from, to } of inLog) {
    const outage = { rcd, from, to, restored: false }
    if (to < Math.max(since, now - TRIP_TOLD_WITHIN_MS) || known.some((one) => isSame(one, outage))) continue
    known.push(outage)
    const text = `${rcdName(sheet, rcd)} opened ${whenOf(from, to, sheet.timeZone)}: the log shows it, nobody wrote it down.`
    notices.push({ key: `trip/${rcd}/${from}`, kind: 'trip', text, figures: { trip: null, ...outage } })
  }
  const records = new Map(trips.map(({ id, body }) => [`trip/${id}`, body]))
  const over = matters.filter((matter) => {
    if (matter.kind !== 'trip' || matter.closedAt !== null) return false
    return records.get(matter.key)?.restoredAt !== undefined || Math.abs(now - outageIn(matter).to) > OPEN_MS
  })
  return { notices, over: over.map(({ key }) => key) }
}

function outageOf({ rcd, at, after, before, restoredAt }: Trip): Outage | undefined {
  const from = at ?? after
  const to = restoredAt ?? at ?? before
  return from === undefined || to === undefined ? undefined : { rcd, from, to, restored: restoredAt !== undefined }
}

function outageIn({ figures }: OpenMatter): Outage {
  const { rcd, from, to, restored } = figures
  return { rcd: String(rcd), from: Number(from), to: Number(to), restored: restored === true }
}

function isSame(a: Outage, b: Outage): boolean {
  const reach = ({ to, restored }: Outage): number => (restored ? to : to + SAME_TRIP_MS)
  return a.rcd === b.rcd && a.from <= reach(b) && b.from <= reach(a)
}

function textOf(sheet: SiteSheet, { rcd, at, after, before, restoredAt, note }: Trip): string {
  const zone = sheet.timeZone
  const when = whenOf(at ?? after ?? 0, at ?? before ?? 0, zone)
  const back = restoredAt === undefined ? '' : ` The supply was back at ${localTime(restoredAt, zone)}.`
  const said = note === undefined || note.trim() === '' ? '' : ` Note: ${note.replace(/\s+/g, ' ').slice(0, 200)}`
  return `${rcdName(sheet, rcd)} tripped ${when}.${back}${said}`
}

function whenOf(from: number, to: number, zone: string): string {
  return from === to ? `at ${localTime(from, zone)}` : `between ${localTime(from, zone)} and ${localTime(to, zone)}`
}
