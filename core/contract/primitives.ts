import { z } from 'zod'

/** Earliest and latest instant any record may carry (epoch ms): a logger that says 1970 or 2106 has lost its clock. */
export const EARLIEST_MS: number = Date.UTC(2000, 0, 1)
export const LATEST_MS: number = Date.UTC(2100, 0, 1)

const RFC3339 = /^(\d{4})-(\d{2})-(\d{2})[Tt ](\d{2}):(\d{2}):(\d{2})(?:\.(\d{1,9}))?(?:([Zz])|([+-])(\d{2}):(\d{2}))$/

/** Either the epoch milliseconds an input stands for, or the reason it stands for none. */
export type InstantReading = { readonly ms: number } | { readonly why: string }

/**
 * Reads one time as the contract writes it: RFC 3339 with offset, or epoch milliseconds as a number.
 * Fractions finer than a millisecond are cut. Never throws.
 */
export function readInstant(input: unknown): InstantReading {
  if (typeof input === 'number') return readEpoch(input)
  if (typeof input !== 'string') {
    return { why: 'a time is RFC 3339 text with an offset, or epoch milliseconds as a number' }
  }
  const m = RFC3339.exec(input)
  if (m === null) {
    return /^\d{4}-\d{2}-\d{2}[Tt ]\d{2}:\d{2}/.test(input)
      ? { why: 'time without an offset, or not RFC 3339: write it as 2026-09-21T02:14:05Z or with +02:00' }
      : { why: 'not an RFC 3339 time' }
  }
  const [year, month, day, hour, minute, second] = m.slice(1, 7).map(Number) as [
    number,
    number,
    number,
    number,
    number,
    number,
  ]
  const offsetHour = Number(m[10] ?? 0)
  const offsetMinute = Number(m[11] ?? 0)
  const date = new Date(Date.UTC(year, month - 1, day))
  const dayExists = date.getUTCMonth() === month - 1 && date.getUTCDate() === day
  if (!dayExists || hour > 23 || minute > 59 || second > 59 || offsetHour > 23 || offsetMinute > 59) {
    return { why: 'no such date or time of day' }
  }
  const millis = Number((m[7] ?? '').slice(0, 3).padEnd(3, '0'))
  const offset = (m[9] === '-' ? -1 : 1) * (offsetHour * 60 + offsetMinute) * 60_000
  return readEpoch(Date.UTC(year, month - 1, day, hour, minute, second, millis) - offset)
}

function readEpoch(ms: number): InstantReading {
  if (!Number.isFinite(ms)) return { why: 'time is not a finite number' }
  if (!Number.isInteger(ms)) return { why: 'epoch milliseconds must be a whole number' }
  if (ms < EARLIEST_MS || ms >= LATEST_MS) {
    return { why: 'time lies outside the years 2000 to 2099 (seconds instead of milliseconds?)' }
  }
  return { ms }
}

/** A time as posted; decodes to epoch milliseconds. */
export const InstantIn = z
  .union([z.string().max(40), z.number()])
  .meta({ description: 'RFC 3339 with offset, or epoch milliseconds', examples: ['2026-09-21T02:14:05Z'] })
  .transform((value, ctx) => {
    const read = readInstant(value)
    if ('ms' in read) return read.ms
    ctx.issues.push({ code: 'custom', message: read.why, input: value })
    return z.NEVER
  })

/** A time as answered in records: RFC 3339, UTC, milliseconds only when there are any. */
export const InstantOut = z.string().meta({ description: 'RFC 3339, UTC', examples: ['2026-09-21T02:14:05Z'] })

/** Epoch milliseconds as the record form of the contract. */
export function writeInstant(ms: number): string {
  return new Date(ms).toISOString().replace('.000Z', 'Z')
}

/** A short reference that the site sheet gives to a device, circuit, load or channel. */
export const Ref = z
  .string()
  .regex(/^[A-Za-z0-9._-]{1,40}$/, '1 to 40 characters of A-Z a-z 0-9 . _ -')
  .meta({ description: 'short reference, unique within the site and kind', examples: ['7'] })

/** `circuit:REF` or `load:REF`: a thing that can be on, off, or a suspect. */
export const Subject = z
  .string()
  .regex(/^(circuit|load):[A-Za-z0-9._-]{1,40}$/, 'circuit:REF or load:REF')
  .meta({ description: 'circuit:REF or load:REF', examples: ['load:mixer'] })

/** Free text that people write; bounded, no control characters but line breaks and tabs. */
export const Note = z
  .string()
  .max(2_000)
  .refine((s) => ![...s].some((c) => c < ' ' && c !== '\n' && c !== '\t'), 'control characters are not allowed')

/** A name or label, one line. */
export const Label = z
  .string()
  .max(120)
  .refine((s) => ![...s].some((c) => c < ' '), 'control characters are not allowed')

/** Answer to a posted list: what is new, what was there already. */
export const Posted = z.object({
  stored: z.int().min(0).meta({ description: 'how many are new' }),
  repeated: z.int().min(0).meta({ description: 'how many were there already; they were left as they are' }),
  ids: z.array(z.string()).meta({ description: 'one id for each thing posted, in order' }),
})

/** A page of a list. */
export function pageOf<T extends z.ZodType>(
  item: T,
): z.ZodObject<{ items: z.ZodArray<T>; next: z.ZodNullable<z.ZodString> }> {
  return z.object({
    items: z.array(item),
    next: z.string().nullable().meta({ description: '?after= of the next page, null at the end' }),
  })
}
