import { z } from 'zod'
import { readInstant } from '../../core/contract/index.ts'

/** A time in a query: RFC 3339 with offset, or epoch milliseconds in digits; decodes to epoch milliseconds. */
export const InstantQuery = z
  .string()
  .max(40)
  .meta({
    description: 'RFC 3339 with offset, or epoch milliseconds',
    examples: ['2026-09-21T02:14:05Z', '1790000000000'],
  })
  .transform((text, ctx) => {
    // A plus sign that nobody escaped arrives as a space.
    const mended = text.replace(/ (\d{2}:\d{2})$/, '+$1')
    const read = readInstant(/^-?\d{1,20}$/.test(text) ? Number(text) : mended)
    if ('ms' in read) return read.ms
    ctx.issues.push({ code: 'custom', message: read.why, input: text })
    return z.NEVER
  })

const Digits = z.string().regex(/^\d{1,9}$/, 'must be a whole number')

/** A whole number in a query, between two bounds. */
export function countQuery(least: number, greatest: number, usual: number): z.ZodType<number, string | undefined> {
  return Digits.transform(Number)
    .pipe(z.number().min(least).max(greatest))
    .default(usual)
    .meta({ description: `a whole number from ${least} to ${greatest}; ${usual} when left out` })
}

/** Where a list goes on, and how long its page is. */
export const pageFields = {
  after: z.string().max(200).optional().meta({ description: '"next" of the page before' }),
  limit: countQuery(1, 1_000, 100),
} as const

/** A half-open span whose ends may be left out. */
export const spanFields = {
  from: InstantQuery.optional(),
  to: InstantQuery.optional(),
} as const

/** True unless both ends are there and the wrong way round. */
export function inOrder(query: { readonly from?: number | undefined; readonly to?: number | undefined }): boolean {
  return query.from === undefined || query.to === undefined || query.from < query.to
}

export const OUT_OF_ORDER: { path: string[]; error: string } = { path: ['to'], error: 'must be later than "from"' }
