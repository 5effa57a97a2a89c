import type { Channel, SiteSheet } from '../../core/contract/index.ts'
import { readInstant } from '../../core/contract/index.ts'
import type { ReadingBatch } from '../store/port.ts'
import { check } from './check.ts'
import { Refused } from './refused.ts'
import { type Resolved, resolveSenml, SenmlPack, type SenmlRecord } from './senml-record.ts'
import { SumMeans } from './senml-sums.ts'
import { Refusals, type Taken } from './taken.ts'
import { inContractUnit } from './units.ts'
import { whyNoValue } from './value.ts'

/**
 * Reads a SenML pack, or a stream of records taken whole (RFC 8428). Each record is one reading, refused alone when its
 * channel, unit, value or time will not do.
 * @throws {Refused} when it is no pack, or carries a label that must be understood and is not
 */
export function takeSenml(body: unknown, sheet: SiteSheet, nowMs: number): Taken {
  const pack = check(SenmlPack, body)
  refuseUnknownMusts(pack)
  refuseMixedVersions(pack)
  const channels = new Map(sheet.channels.map((channel) => [channel.ref, channel]))
  const known = knownNames(channels)
  const refusals = new Refusals()
  const columns = new Map<string, { readonly t: number[]; readonly v: number[] }>()
  const expected = new Map<string, number>()
  const sums = new SumMeans()
  const records = resolveSenml(pack, nowMs)
  let given = 0
  for (const record of records) {
    const channel = channelNamed(record.name, channels)
    if (channel === undefined) {
      given++
      refusals.add(0, record.index, 'n', `there is no channel "${record.name.slice(0, 80)}"; known are ${known}`)
      continue
    }
    if (record.updateSeconds !== undefined && record.updateSeconds > 0) {
      expected.set(channel.ref, record.updateSeconds * 1_000)
    }
    const read = readingOf(record, channel, sums)
    if (read === 'anchor') continue
    given++
    if ('why' in read) {
      refusals.add(0, record.index, read.column, read.why)
      continue
    }
    const column = columns.get(channel.ref) ?? { t: [], v: [] }
    column.t.push(read.t)
    column.v.push(read.v)
    columns.set(channel.ref, column)
  }
  for (const index of sums.alone()) {
    given++
    refusals.add(0, index, 's', 'a sum makes a reading only together with an earlier sum of the same name in this pack')
  }
  const batches = [...columns].map(
    ([channel, { t, v }]): ReadingBatch => ({ channel, t: Float64Array.from(t), v: Float64Array.from(v) }),
  )
  return { batches, given, refusals, expected }
}

function refuseUnknownMusts(pack: readonly SenmlRecord[]): void {
  pack.forEach((record, i) => {
    for (const label in record) {
      if (!label.endsWith('_')) continue
      throw new Refused('The pack carries a label that must be understood.', [
        { path: `/${i}/${label.slice(0, 80)}`, why: 'this label is not understood here' },
      ])
    }
  })
}

/** All records of a pack are of one version (RFC 8428, section 4.4). */
function refuseMixedVersions(pack: readonly SenmlRecord[]): void {
  let version: number | undefined
  pack.forEach(({ bver }, i) => {
    if (bver === undefined) return
    version ??= bver
    if (bver !== version) {
      throw new Refused('The pack mixes versions.', [{ path: `/${i}/bver`, why: `is ${bver}, was ${version} before` }])
    }
  })
}

type Read =
  | { readonly t: number; readonly v: number }
  | { readonly column: string; readonly why: string }
  /** The first of several sums: it makes no reading by itself. */
  | 'anchor'

function readingOf(record: Resolved, channel: Channel, sums: SumMeans): Read {
  const { seconds, unit, state, sum } = record
  const values = [record.value, state, record.data || undefined].filter((one) => one !== undefined)
  if (values.length > 1) return { column: 'v', why: 'a record has one value: "v", "vs", "vb" or "vd"' }
  if (record.data) return { column: 'vd', why: 'data ("vd") are no reading of any channel' }
  const time = readInstant(Math.round(seconds * 1_000))
  if (!('ms' in time)) return { column: 't', why: time.why }
  if (state !== undefined) return stateReading(state, channel, time.ms)
  let value = record.value
  let rate = false
  if (value === undefined) {
    const mean = sums.next(record.name, record.index, seconds, sum!)
    if (mean === undefined) return 'anchor'
    if ('why' in mean) return { column: 's', why: mean.why }
    rate = channel.quantity === 'rain'
    value = rate ? mean.difference : mean.mean
  }
  const converted = inContractUnit(value, unit, channel.quantity, rate)
  if (converted === undefined) return { column: 'u', why: whyNoUnit(unit, channel) }
  const why = whyNoValue(converted, channel.quantity)
  return why === undefined ? { t: time.ms, v: converted } : { column: record.value === undefined ? 's' : 'v', why }
}

const STATES: Readonly<Record<string, number>> = { on: 1, off: 0, true: 1, false: 0, running: 1, stopped: 0 }

function stateReading(state: string | boolean, channel: Channel, t: number): Read {
  const column = typeof state === 'boolean' ? 'vb' : 'vs'
  if (channel.quantity !== 'running') {
    return { column, why: `${channel.quantity} is a number ("v"); "vb" and "vs" are for running channels` }
  }
  const v = typeof state === 'boolean' ? Number(state) : STATES[state.trim().toLowerCase()]
  if (v !== undefined) return { t, v }
  return { column, why: `a state is one of ${Object.keys(STATES).join(', ')}` }
}

function whyNoUnit(unit: string | undefined, { quantity }: Channel): string {
  if (quantity === 'rain' && /\/(s|h)$/.test(unit ?? '')) {
    return `"${unit}" is a rate: post rain as mm per interval, or the rate's sums ("s")`
  }
  return `unit "${unit}" does not measure ${quantity}`
}

/** A name is a channel, or ends in one after a ":" or "/": base names usually are addresses of the device. */
function channelNamed(name: string, channels: ReadonlyMap<string, Channel>): Channel | undefined {
  return channels.get(name) ?? channels.get(name.slice(Math.max(name.lastIndexOf(':'), name.lastIndexOf('/')) + 1))
}

function knownNames(channels: ReadonlyMap<string, Channel>): string {
  const names = [...channels.keys()]
  const shown = names.slice(0, 20).join(', ')
  return names.length > 20 ? `${shown} and ${names.length - 20} more` : shown || 'none'
}
