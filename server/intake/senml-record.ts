import { z } from 'zod'
import { MAX_READINGS_PER_BODY } from '../../core/contract/index.ts'

const text = (what: string, most = 200) => z.string().max(most).optional().meta({ description: what })
const number = (what: string) => z.number().optional().meta({ description: what })

/** The newest version all of whose base fields are known here (RFC 8428, section 4.4). */
const NEWEST_VERSION = 10
/** Version 10 with the feature "secondary units" (RFC 9100, section 5; from memory). */
const WITH_SECONDARY_UNITS = 26

/** One record of a pack (RFC 8428, section 4); what else it carries is looked at for must-understand labels. */
export const SenmlRecord = z.looseObject({
  bn: text('base name'),
  bt: number('base time, s'),
  bu: text('base unit', 40),
  bv: number('base value'),
  bs: number('base sum'),
  bver: z
    .int()
    .min(1)
    .refine(
      (version) => version <= NEWEST_VERSION || version === WITH_SECONDARY_UNITS,
      'versions up to 10 are understood, and 26 (secondary units)',
    )
    .optional()
    .meta({ description: `version: up to ${NEWEST_VERSION}, or ${WITH_SECONDARY_UNITS} for secondary units` }),
  n: text('name: a channel, or something that ends in ":" or "/" and a channel'),
  u: text('unit', 40),
  v: number('value'),
  vs: text('on or off, for running channels', 10_000),
  vb: z.boolean().optional().meta({ description: 'on or off, for running channels' }),
  vd: z.string().optional().meta({ description: 'data: no channel takes them' }),
  s: number('integral of the value over time: two of them make the mean in between'),
  t: number('time, s; below 2^28 relative to now'),
  ut: number('the next record comes within so many s'),
})

/** A pack: records that build on base values of those before. */
export const SenmlPack = z.array(SenmlRecord).max(MAX_READINGS_PER_BODY).meta({ description: 'SenML (RFC 8428)' })

export type SenmlRecord = z.infer<typeof SenmlRecord>

/** What a record with its base values worked in says at its time. */
export interface Resolved {
  /** Place of the record in the pack. */
  readonly index: number
  readonly name: string
  /** Since the epoch. */
  readonly seconds: number
  readonly unit: string | undefined
  readonly value: number | undefined
  /** Set for `vs` and `vb`. */
  readonly state: string | boolean | undefined
  /** True for `vd`, which no channel takes. */
  readonly data: boolean
  readonly sum: number | undefined
  /** The next record of this name comes within so many seconds. */
  readonly updateSeconds: number | undefined
}

/** Times below this are relative to now (RFC 8428, section 4.5.3). */
const RELATIVE_BELOW = 2 ** 28

/**
 * Works base values into every record that carries something (RFC 8428, section 4.6). Records with base values alone
 * vanish: neither a base value nor a base sum implies a measurement.
 */
export function resolveSenml(pack: readonly SenmlRecord[], nowMs: number): Resolved[] {
  let bn = ''
  let bt = 0
  let bv = 0
  let bs = 0
  let bu: string | undefined
  const resolved: Resolved[] = []
  pack.forEach((record, index) => {
    bn = record.bn ?? bn
    bt = record.bt ?? bt
    bv = record.bv ?? bv
    bs = record.bs ?? bs
    bu = record.bu ?? bu
    const { v, vs, vb, vd, s } = record
    if (v === undefined && vs === undefined && vb === undefined && vd === undefined && s === undefined) return
    const time = bt + (record.t ?? 0)
    resolved.push({
      index,
      name: bn + (record.n ?? ''),
      seconds: time < RELATIVE_BELOW ? nowMs / 1_000 + time : time,
      unit: record.u ?? bu,
      value: v === undefined ? undefined : addDecimal(bv, v),
      state: vb ?? vs,
      data: vd !== undefined,
      sum: s === undefined ? undefined : addDecimal(bs, s),
      updateSeconds: record.ut,
    })
  })
  return resolved
}

/** True when a time of the pack counts from now: sent again later, it would mean another instant. */
export function hasRelativeTimes(pack: readonly SenmlRecord[]): boolean {
  let bt = 0
  return pack.some((record) => {
    bt = record.bt ?? bt
    return bt + (record.t ?? 0) < RELATIVE_BELOW
  })
}

/** Adds as a person would: 10.1 and 0.2 are 10.3, not 10.299999999999999. */
function addDecimal(base: number, part: number): number {
  if (base === 0) return part
  return Number((base + part).toPrecision(15))
}
