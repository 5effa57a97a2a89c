import { z } from 'zod'
import { type Channel, MAX_READINGS_PER_BODY, readInstant, type SiteSheet } from '../../core/contract/index.ts'
import type { ReadingBatch } from '../store/port.ts'
import { check } from './check.ts'
import { Refused } from './refused.ts'
import { Refusals, type Taken } from './taken.ts'
import { inContractUnit } from './units.ts'
import { whyNoValue } from './value.ts'

/** One record of a pack (RFC 8428, table 2 of section 6); what else it carries is looked at for must-understand labels. */
export const SenmlRecord = z.looseObject({
  bn: z.string().max(200).optional().meta({ description: 'base name' }),
  bt: z.number().optional().meta({ description: 'base time, s' }),
  bu: z.string().max(40).optional().meta({ description: 'base unit' }),
  bv: z.number().optional().meta({ description: 'base value' }),
  bver: z.int().min(1).max(10, 'versions up to 10 are understood').optional(),
  n: z
    .string()
    .max(200)
    .optional()
    .meta({ description: 'name: a channel, or something that ends in ":" or "/" and a channel' }),
  u: z.string().max(40).optional().meta({ description: 'unit' }),
  v: z.number().optional().meta({ description: 'value' }),
  vb: z.boolean().optional().meta({ description: 'on or off, for running channels' }),
  t: z.number().optional().meta({ description: 'time, s; below 2^28 relative to now' }),
})

/** A pack: records that build on base values of those before. */
export const SenmlPack = z.array(SenmlRecord).max(MAX_READINGS_PER_BODY).meta({ description: 'SenML (RFC 8428)' })

/** A record with its base values worked in (RFC 8428, section 4.6): name, time in s since the epoch, unit, value. */
export interface Resolved {
  readonly index: number
  readonly name: string
  readonly seconds: number
  readonly unit: string | undefined
  /** Absent for a record that only carries text, data or a sum. */
  readonly value: number | undefined
}

/** Times below this are relative to now (RFC 8428, section 4.5.3). */
const RELATIVE_BELOW = 2 ** 28

/** Works base values into every record that carries something. Records with base values alone vanish. */
export function resolveSenml(pack: readonly z.infer<typeof SenmlRecord>[], nowMs: number): Resolved[] {
  let bn = ''
  let bt = 0
  let bv = 0
  let bu: string | undefined
  const resolved: Resolved[] = []
  pack.forEach((record, index) => {
    bn = record.bn ?? bn
    bt = record.bt ?? bt
    bv = record.bv ?? bv
    bu = record.bu ?? bu
    if (!['v', 'vb', 'vs', 'vd', 's'].some((label) => label in record)) return
    const time = bt + (record.t ?? 0)
    const value = record.v === undefined ? (record.vb === undefined ? undefined : Number(record.vb)) : bv + record.v
    resolved.push({
      index,
      name: bn + (record.n ?? ''),
      seconds: time < RELATIVE_BELOW ? nowMs / 1_000 + time : time,
      unit: record.u ?? bu,
      value,
    })
  })
  return resolved
}

/**
 * Reads a SenML pack. Each record is one reading, refused alone when its channel, unit, value or time will not do.
 * @throws {Refused} when it is no pack, or carries a label that must be understood and is not
 */
export function takeSenml(body: unknown, sheet: SiteSheet, nowMs: number): Taken {
  const pack = check(SenmlPack, body)
  pack.forEach((record, i) => {
    const label = Object.keys(record).find((name) => name.endsWith('_'))
    if (label !== undefined) {
      throw new Refused('The pack carries a label that must be understood.', [
        { path: `/${i}/${label}`, why: 'this label is not understood here' },
      ])
    }
  })
  const channels = new Map(sheet.channels.map((channel) => [channel.ref, channel]))
  const known = knownNames(channels)
  const refusals = new Refusals()
  const columns = new Map<string, { readonly t: number[]; readonly v: number[] }>()
  const records = resolveSenml(pack, nowMs)
  for (const record of records) {
    const channel = channelNamed(record.name, channels)
    if (channel === undefined) {
      refusals.add(0, record.index, 'n', `there is no channel "${record.name}"; known are ${known}`)
      continue
    }
    const read = readingOf(record, channel)
    if ('why' in read) {
      refusals.add(0, record.index, read.column, read.why)
      continue
    }
    const column = columns.get(channel.ref) ?? { t: [], v: [] }
    column.t.push(read.t)
    column.v.push(read.v)
    columns.set(channel.ref, column)
  }
  const batches = [...columns].map(
    ([channel, { t, v }]): ReadingBatch => ({ channel, t: Float64Array.from(t), v: Float64Array.from(v) }),
  )
  return { batches, given: records.length, refusals }
}

function readingOf(
  { seconds, unit, value }: Resolved,
  channel: Channel,
): { readonly t: number; readonly v: number } | { readonly column: string; readonly why: string } {
  if (value === undefined) return { column: 'v', why: 'only "v", or "vb" for a running channel, makes a reading' }
  const converted = inContractUnit(value, unit, channel.quantity)
  if (converted === undefined) return { column: 'u', why: `unit "${unit}" does not measure ${channel.quantity}` }
  const why = whyNoValue(converted, channel.quantity)
  if (why !== undefined) return { column: 'v', why }
  const time = readInstant(Math.round(seconds * 1_000))
  return 'ms' in time ? { t: time.ms, v: converted } : { column: 't', why: time.why }
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
