import { z } from 'zod'
import { Ref } from './primitives.ts'
import type { Quantity } from './site-sheet.ts'

/** The most readings one body may carry. */
export const MAX_READINGS_PER_BODY = 1_000_000

/**
 * One channel's columns as posted. The items stay unchecked here: intake checks each reading on its own, so that a bad
 * one is refused alone and its neighbours are kept.
 */
export const ReadingBlock = z.object({
  channel: Ref,
  t: z.custom<readonly unknown[]>(Array.isArray, 'must be a list of times'),
  v: z.custom<readonly unknown[]>(Array.isArray, 'must be a list of numbers'),
})

export const ReadingsIn = z.object({ blocks: z.array(ReadingBlock).max(10_000) })

export const RefusedReading = z.object({ block: z.int(), index: z.int(), why: z.string() })

/** The most refusals that are listed one by one; the rest is counted. */
export const MAX_REFUSED_LISTED = 100

export const ReadingsAnswer = z.object({
  stored: z.int().meta({ description: 'new readings, durable now' }),
  repeated: z.int().meta({ description: 'were there already with the same value' }),
  conflicting: z
    .int()
    .meta({ description: 'were there with another value; the stored one stayed unless ?replace=true' }),
  refused: z
    .array(RefusedReading)
    .meta({ description: `the first ${MAX_REFUSED_LISTED} readings that could not be taken` }),
  refusedCount: z.int().meta({ description: 'how many readings could not be taken in all' }),
})

/** Trace for drawing: epoch ms and values, null where a gap lies. */
export const Trace = z.object({
  t: z.array(z.number()),
  v: z.array(z.number().nullable()),
  exact: z.boolean().meta({ description: 'true when every stored reading of the span is in it' }),
  stored: z.int().meta({ description: 'readings stored in the span' }),
})

export type ReadingBlock = z.infer<typeof ReadingBlock>
export type ReadingsAnswer = z.infer<typeof ReadingsAnswer>
export type RefusedReading = z.infer<typeof RefusedReading>
export type Trace = z.infer<typeof Trace>

/** Least and greatest value a quantity can have on any site; what lies outside is an instrument at full scale or a wrong unit. */
export const PLAUSIBLE: Readonly<Record<Quantity, readonly [number, number]>> = {
  leakage: [-60_000, 60_000],
  'load-current': [-10_000, 10_000],
  running: [0, 1],
  voltage: [-2_000, 2_000],
  rain: [0, 500],
  temperature: [-90, 90],
  humidity: [0, 110],
}
