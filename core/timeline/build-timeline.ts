import type { Channel, Rcd } from '../contract/site-sheet.ts'
import { CoreError } from '../errors.ts'
import type { Evidence, Kept } from './evidence.ts'
import { both, clipExposure, edgesOf } from './exposure.ts'
import { leakageOf } from './group-leakage.ts'
import { localClock } from './local-clock.ts'
import { otherFalls } from './other-falls.ts'
import { byTime, writtenTrip } from './outages.ts'
import { sendsOnlyChanges } from './running.ts'
import { gapLimit, gaps, loggedSpans, type Series, sliceSeries } from './series.ts'
import { eachSpan, intersect, spanAt, spansOf, subtract } from './spans.ts'
import { supplyOf } from './supply.ts'
import { type StateSources, stateOf } from './thing-states.ts'
import type { Thing, Timeline, TimelineTrip } from './timeline.ts'

/** A load that comes on so soon after the device was closed again came back with the supply, ms. */
const COMES_BACK_WITHIN = 60_000

/**
 * Builds the timeline of one device from all that is known of its site. The order of records does not matter; records
 * that speak of things no longer on the sheet are set aside with a note. Linear in readings, n log n in records.
 * @throws {CoreError} unknown_reference when the device is not on the sheet, out_of_range when the span is empty
 */
export function buildTimeline(evidence: Evidence): Timeline {
  const { sheet, from, to } = evidence
  if (!(from < to)) throw new CoreError('out_of_range', `buildTimeline needs from < to, got ${from} and ${to}`)
  const rcd = sheet.rcds.find((r) => r.ref === evidence.rcd)
  if (rcd === undefined) throw new CoreError('unknown_reference', `buildTimeline got no rcd "${evidence.rcd}"`)
  const notes: string[] = []
  const series = cut(evidence.series, sheet.channels, from, to)
  const own = (channel: Channel): boolean => channel.rcd === rcd.ref
  const leakage = leakageOf(sheet.channels.filter(own), series)
  notes.push(...leakage.notes, ...dangling(evidence))

  const supply = supplyOf({ evidence, rcd, series, leakage: leakage.level })
  notes.push(...supply.notes)
  const energised = supply.energised

  const sources: StateSources = {
    from,
    to,
    energised,
    clock: localClock(sheet.timeZone),
    channels: sheet.channels,
    series,
    switchings: grouped([...evidence.switchings].sort((a, b) => a.at - b.at || order(a.id, b.id))),
    timetables: grouped([...evidence.timetables].sort((a, b) => order(a.id, b.id))),
  }
  const first = (quantity: Channel['quantity'], where: (channel: Channel) => boolean): Series | null => {
    for (const channel of sheet.channels) {
      if (channel.quantity === quantity && where(channel) && series.has(channel.ref)) return series.get(channel.ref)!
    }
    return null
  }
  const ofSite = (channel: Channel): boolean =>
    channel.rcd === undefined && channel.circuit === undefined && channel.load === undefined
  const weather = (quantity: 'rain' | 'temperature' | 'humidity'): Series | null =>
    first(quantity, ofSite) ?? first(quantity, () => true)

  const level = supply.leakage
  return {
    sheet,
    rcd,
    from,
    to,
    energised,
    leakage: level,
    conductive: leakage.conductive,
    capacitive: leakage.capacitive,
    logged: level === null ? spansOf([]) : subtract(intersect(loggedSpans(level), energised), supply.misread),
    gaps: gapsOf(sheet.channels, series, from, to),
    things: thingsOf(rcd, sources, notes),
    trips: within(supply.trips, from, to),
    otherTrips: within(
      [
        ...evidence.trips
          .filter((trip) => trip.rcd !== rcd.ref && sheet.rcds.some((r) => r.ref === trip.rcd))
          .map(writtenTrip),
        ...otherFalls(evidence, rcd.ref, series),
      ].sort(byTime),
      from,
      to,
    ),
    rain: weather('rain'),
    temperature: weather('temperature'),
    humidity: weather('humidity'),
    loadCurrent: first('load-current', own),
    voltage: first('voltage', own),
    tests: evidence.tests
      .filter((test) => ('rcd' in test ? test.rcd === rcd.ref : belongs(rcd, test.of)))
      .sort((a, b) => a.at - b.at || order(a.id, b.id)),
    remedies: evidence.remedies
      .filter((r) => (r.rcd === undefined || r.rcd === rcd.ref) && (r.of === undefined || belongs(rcd, r.of)))
      .sort((a, b) => a.at - b.at || order(a.id, b.id)),
    notes,
  }
}

/** Circuits and loads of the device with their states, in the order of the sheet. */
function thingsOf(rcd: Rcd, sources: StateSources, notes: string[]): Thing[] {
  const things: Thing[] = []
  for (const circuit of rcd.circuits) {
    const above = stateOf('circuit', circuit.ref, sources, notes)
    const add = (kind: 'circuit' | 'load', ref: string, label: string | undefined, isolation: Thing['isolation']) => {
      const own = kind === 'circuit' ? above : stateOf(kind, ref, sources, notes)
      const whole = kind === 'circuit' ? own.state : both(own.state, above.state)
      const state = clipExposure(whole, sources.energised)
      const leakage = leakageOf(
        sources.channels.filter((c) => c[kind] === ref),
        sources.series,
      )
      notes.push(...leakage.notes)
      const byChannel = own.source === 'running' || own.source === 'load-current'
      things.push({
        of: `${kind}:${ref}`,
        kind,
        ref,
        label: label ?? (kind === 'circuit' ? `circuit ${ref}` : ref),
        circuit: circuit.ref,
        isolation,
        state,
        changes: edgesOf(state).filter((e) => !(byChannel && e.on && comesBack(e.at, sources))),
        source: own.source,
        readEveryMs: own.readEveryMs,
        leakage: leakage.level,
      })
    }
    add('circuit', circuit.ref, circuit.label, circuit.isolation)
    // Unplugging, or a load's own switch, takes both poles away.
    for (const load of circuit.loads) add('load', load.ref, load.label, 'two-pole')
  }
  return things
}

/** Whether the instant follows so closely on the device's closing that the supply, not the load, made the change. */
function comesBack(at: number, { energised, from }: StateSources): boolean {
  const span = spanAt(energised, at)
  return span !== undefined && span.from > from && at - span.from < COMES_BACK_WITHIN
}

/** Series of the sheet's channels within the span; empty ones are left out. */
function cut(
  all: ReadonlyMap<string, Series>,
  channels: readonly Channel[],
  from: number,
  to: number,
): ReadonlyMap<string, Series> {
  const out = new Map<string, Series>()
  for (const { ref } of channels) {
    const series = all.get(ref)
    const slice = series === undefined ? undefined : sliceSeries(series, from, to)
    if (slice !== undefined && slice.t.length > 0) out.set(ref, slice)
  }
  return out
}

/** Gaps of every channel with readings, those before its first and after its last one included. */
function gapsOf(
  channels: readonly Channel[],
  series: ReadonlyMap<string, Series>,
  from: number,
  to: number,
): Timeline['gaps'] {
  const out: { channel: string; from: number; to: number }[] = []
  for (const { ref, quantity } of channels) {
    const s = series.get(ref)
    if (s === undefined || (quantity === 'running' && sendsOnlyChanges(s))) continue
    const limit = gapLimit(s) || 0
    const first = s.t[0]!
    const last = s.t[s.t.length - 1]!
    if (first - from > limit) out.push({ channel: ref, from, to: first })
    for (const gap of eachSpan(gaps(s, limit))) out.push({ channel: ref, ...gap })
    if (to - last > limit) out.push({ channel: ref, from: last, to })
  }
  return out
}

/** Trips that lie in [from, to) by their middle, so that neighbouring spans never count one twice; cut to the span. */
function within(trips: readonly TimelineTrip[], from: number, to: number): TimelineTrip[] {
  return trips
    .filter((trip) => (trip.from + trip.to) / 2 >= from && (trip.from + trip.to) / 2 < to)
    .map((trip) => ({ ...trip, from: Math.max(from, trip.from), to: Math.min(to, trip.to) }))
}

/** A note for each kind of record that speaks of what is not on the sheet. */
function dangling(evidence: Evidence): string[] {
  const { rcds } = evidence.sheet
  const known = (of: string): boolean => rcds.some((rcd) => belongs(rcd, of))
  const device = (ref: string): boolean => rcds.some((rcd) => rcd.ref === ref)
  const lost: readonly (readonly [string, readonly string[]])[] = [
    ['Trips', evidence.trips.filter((t) => !device(t.rcd)).map((t) => `rcd ${t.rcd}`)],
    ['Switchings', evidence.switchings.filter((s) => !known(s.of)).map((s) => s.of)],
    ['Timetables', evidence.timetables.filter((t) => !known(t.of)).map((t) => t.of)],
    [
      'Tests',
      evidence.tests.flatMap((t) => ('rcd' in t ? (device(t.rcd) ? [] : [`rcd ${t.rcd}`]) : known(t.of) ? [] : [t.of])),
    ],
    [
      'Remedies',
      evidence.remedies.flatMap((r) => [
        ...(r.of !== undefined && !known(r.of) ? [r.of] : []),
        ...(r.rcd !== undefined && !device(r.rcd) ? [`rcd ${r.rcd}`] : []),
      ]),
    ],
  ]
  return lost
    .filter(([, refs]) => refs.length > 0)
    .map(
      ([kind, refs]) =>
        `${kind} about what is not on the site sheet (${[...new Set(refs)].sort().join(', ')}) are set aside: ${refs.length}.`,
    )
}

function belongs(rcd: Rcd, of: string): boolean {
  return rcd.circuits.some((c) => of === `circuit:${c.ref}` || c.loads.some((load) => of === `load:${load.ref}`))
}

function grouped<T extends { readonly of: string }>(records: readonly Kept<T>[]): ReadonlyMap<string, Kept<T>[]> {
  const out = new Map<string, Kept<T>[]>()
  for (const record of records) {
    const list = out.get(record.of)
    if (list === undefined) out.set(record.of, [record])
    else list.push(record)
  }
  return out
}

function order(a: string, b: string): number {
  return a < b ? -1 : a > b ? 1 : 0
}
