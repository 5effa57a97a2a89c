import { z } from 'zod'
import { InstantOut, Label, Ref } from './primitives.ts'

/** Type letters of IEC 60755 and IEC 62423. */
export const RcdType = z.enum(['AC', 'A', 'F', 'B'])
/** `general` opens at once, `S` is time-delayed (selective). */
export const RcdDelay = z.enum(['general', 'S'])
/** What opens with a circuit's device: the line only, or line and neutral. */
export const Isolation = z.enum(['single-pole', 'two-pole'])

export const Load = z.object({ ref: Ref, label: Label.optional() })

export const Circuit = z.object({
  ref: Ref,
  label: Label.optional(),
  device: Label.optional().meta({ description: 'protective device as printed on it', examples: ['B32'] }),
  isolation: Isolation.default('single-pole'),
  loads: z.array(Load).max(200).default([]),
})

export const Rcd = z.object({
  ref: Ref,
  label: Label.optional(),
  ratedMa: z.number().positive().max(30_000).meta({ description: 'rated residual operating current IΔn, mA' }),
  type: RcdType.default('A'),
  delay: RcdDelay.default('general'),
  rampTripMa: z.number().positive().max(30_000).optional().meta({ description: 'trip current by ramp test, mA' }),
  circuits: z.array(Circuit).max(200).default([]),
})

export const Quantity = z.enum(['leakage', 'load-current', 'running', 'voltage', 'rain', 'temperature', 'humidity'])

export const Channel = z.object({
  ref: Ref,
  quantity: Quantity,
  label: Label.optional(),
  rcd: Ref.optional(),
  circuit: Ref.optional(),
  load: Ref.optional(),
  reading: z
    .enum(['rms', 'conductive', 'capacitive', 'dc'])
    .optional()
    .meta({ description: 'leakage only; rms when left out' }),
  accuracy: z
    .object({ percent: z.number().min(0).max(100), digits: z.number().min(0).max(10_000) })
    .optional()
    .meta({ description: 'of the clamp: ±(percent of reading + digits of the last place)' }),
  resolutionMa: z.number().positive().max(1_000).optional().meta({ description: 'one digit of a leakage channel, mA' }),
})

export const Supply = z.object({
  volts: z.number().min(12).max(1_000).default(230),
  hertz: z.number().min(10).max(500).default(50),
  earthing: z.enum(['TN-S', 'TN-C-S', 'TN-C', 'TT', 'IT']).optional(),
})

const SheetFields = z.object({
  name: Label.min(1),
  timeZone: z
    .string()
    .max(64)
    .refine(isTimeZone, 'not a time zone of the IANA database')
    .meta({ examples: ['Europe/Vienna'] }),
  latitude: z.number().min(-90).max(90).optional(),
  longitude: z.number().min(-180).max(180).optional(),
  supply: Supply.optional(),
  rcds: z.array(Rcd).max(100).default([]),
  channels: z.array(Channel).max(1_000).default([]),
})

/**
 * The site sheet: the board, its circuits, loads and channels. References are unique within the site and kind, and
 * every channel hangs on things that exist; what breaks that is refused with its place.
 */
export const SiteSheet = SheetFields.superRefine((sheet, ctx) => {
  for (const fault of sheetFaults(sheet)) {
    ctx.addIssue({ code: 'custom', path: fault.path, message: fault.why })
  }
}).meta({
  description:
    'References are unique within the site and kind. A channel hangs on at most one of rcd, circuit, load, each of which must exist; ' +
    '"running" needs a load, "voltage" and "leakage" hang on a rcd, circuit or load as given.',
})

/** A change of a sheet: any of its fields, each replaced whole; null takes an optional one away. */
export const SiteSheetPatch = z
  .object({
    name: Label.min(1),
    timeZone: z.string().max(64),
    latitude: z.number().nullable(),
    longitude: z.number().nullable(),
    supply: Supply.nullable(),
    rcds: z.array(Rcd).max(100),
    channels: z.array(Channel).max(1_000),
  })
  .partial()

export const SiteOut = SheetFields.extend({ id: z.string(), createdAt: InstantOut, updatedAt: InstantOut })
export const SiteSummary = z.object({
  id: z.string(),
  name: z.string(),
  timeZone: z.string(),
  rcds: z.int(),
  channels: z.int(),
  lastReadingAt: InstantOut.nullable(),
  openMatters: z
    .int()
    .optional()
    .meta({ description: 'silent loggers, trips and high levels that last; see /alerts/matters' }),
  updatedAt: InstantOut,
})

export type Load = z.infer<typeof Load>
export type Circuit = z.infer<typeof Circuit>
export type Rcd = z.infer<typeof Rcd>
export type Quantity = z.infer<typeof Quantity>
export type Channel = z.infer<typeof Channel>
export type SiteSheet = z.infer<typeof SiteSheet>
/** A sheet as a client may write it, defaults left out. */
export type SiteSheetIn = z.input<typeof SiteSheet>
export type SiteSheetPatch = z.infer<typeof SiteSheetPatch>
export type SiteOut = z.infer<typeof SiteOut>
export type SiteSummary = z.infer<typeof SiteSummary>

interface Fault {
  readonly path: (string | number)[]
  readonly why: string
}

/** Doubled and dangling references of a sheet, each with its place. */
function sheetFaults(sheet: z.infer<typeof SheetFields>): Fault[] {
  const faults: Fault[] = []
  const rcds = new Set<string>()
  const circuits = new Set<string>()
  const loads = new Set<string>()
  const channels = new Set<string>()
  const claim = (seen: Set<string>, ref: string, kind: string, path: (string | number)[]): void => {
    if (seen.has(ref)) faults.push({ path, why: `${kind} "${ref}" stands twice on this sheet` })
    seen.add(ref)
  }
  sheet.rcds.forEach((rcd, r) => {
    claim(rcds, rcd.ref, 'rcd', ['rcds', r, 'ref'])
    rcd.circuits.forEach((circuit, c) => {
      claim(circuits, circuit.ref, 'circuit', ['rcds', r, 'circuits', c, 'ref'])
      circuit.loads.forEach((load, l) => {
        claim(loads, load.ref, 'load', ['rcds', r, 'circuits', c, 'loads', l, 'ref'])
      })
    })
  })
  sheet.channels.forEach((channel, i) => {
    claim(channels, channel.ref, 'channel', ['channels', i, 'ref'])
    const hangsOn = [
      ['rcd', channel.rcd, rcds],
      ['circuit', channel.circuit, circuits],
      ['load', channel.load, loads],
    ] as const
    const named = hangsOn.filter(([, ref]) => ref !== undefined)
    if (named.length > 1) {
      faults.push({ path: ['channels', i], why: 'a channel hangs on one of rcd, circuit or load, not on several' })
    }
    for (const [kind, ref, known] of named) {
      if (ref !== undefined && !known.has(ref)) {
        faults.push({ path: ['channels', i, kind], why: `there is no ${kind} "${ref}" on this sheet` })
      }
    }
    if (channel.quantity === 'running' && channel.load === undefined && channel.circuit === undefined) {
      faults.push({ path: ['channels', i], why: 'a channel of quantity running hangs on a load or a circuit' })
    }
    if (channel.quantity !== 'leakage' && channel.reading !== undefined) {
      faults.push({ path: ['channels', i, 'reading'], why: 'only a leakage channel has a reading' })
    }
  })
  return faults
}

/** Whether the runtime's IANA database knows this zone. */
export function isTimeZone(name: string): boolean {
  if (!/^[A-Za-z][A-Za-z0-9_+-]*(\/[A-Za-z0-9_+-]+)*$/.test(name)) return false
  try {
    new Intl.DateTimeFormat('en', { timeZone: name })
    return true
  } catch (error) {
    if (error instanceof RangeError) return false
    throw error
  }
}
