import { z } from 'zod'
import { InstantIn, InstantOut, Label, Note, Ref, Subject } from './primitives.ts'

/** A trip: at a known instant, or somewhere in (after, before]. */
export const TripIn = z
  .object({
    rcd: Ref,
    at: InstantIn.optional(),
    after: InstantIn.optional(),
    before: InstantIn.optional(),
    restoredAt: InstantIn.optional(),
    note: Note.optional(),
    running: z.array(Subject).max(100).optional().meta({ description: 'what was running, as noticed' }),
  })
  .superRefine((trip, ctx) => {
    const fault = (path: string, message: string): void => ctx.addIssue({ code: 'custom', path: [path], message })
    if (trip.at === undefined) {
      if (trip.before === undefined) fault('at', 'a trip needs "at", or "after" and "before"')
      if (trip.before !== undefined && trip.after === undefined) fault('after', 'a trip with "before" needs "after"')
    } else if (trip.after !== undefined || trip.before !== undefined) {
      fault('at', 'a trip has either "at" or "after" and "before", not both')
    }
    if (trip.after !== undefined && trip.before !== undefined && trip.after >= trip.before) {
      fault('before', 'the interval ends before it begins')
    }
    const latestStart = trip.at ?? trip.before
    if (trip.restoredAt !== undefined && latestStart !== undefined && trip.restoredAt < latestStart) {
      fault('restoredAt', 'restored before the trip')
    }
  })
  .meta({
    description:
      'Either "at", or "after" and "before" (the interval it lies in). "restoredAt" is never before the trip.',
  })

export const SwitchingIn = z.object({ of: Subject, at: InstantIn, on: z.boolean(), note: Note.optional() })
export const SwitchingsIn = z.object({ changes: z.array(SwitchingIn).min(1).max(10_000) })

export const Weekday = z.enum(['mon', 'tue', 'wed', 'thu', 'fri', 'sat', 'sun'])
const ClockTime = z.string().regex(/^([01]\d|2[0-3]):[0-5]\d$|^24:00$/, 'a local time as HH:MM')
export const TimetableIn = z.object({
  of: Subject,
  onBetween: z.tuple([ClockTime, ClockTime]).meta({ description: 'local time of the site; may run past midnight' }),
  days: z.array(Weekday).min(1).max(7).default(['mon', 'tue', 'wed', 'thu', 'fri', 'sat', 'sun']),
  from: InstantIn.optional().meta({ description: 'holds from; always when left out' }),
  until: InstantIn.optional().meta({ description: 'holds until; for ever when left out' }),
  note: Note.optional(),
})

export const InsulationTestIn = z.object({
  kind: z.literal('insulation'),
  of: Subject,
  between: z.enum(['live-earth', 'line-earth', 'neutral-earth', 'line-neutral']),
  testVolts: z.number().min(50).max(5_000).default(500),
  megohms: z.number().min(0).max(1_000_000),
  atLeast: z.boolean().default(false).meta({ description: 'the meter was at full scale: the value is a lower bound' }),
  loadsConnected: z.boolean().default(false),
  surgePartsConnected: z.boolean().default(false),
  at: InstantIn,
  note: Note.optional(),
})
export const RampTestIn = z.object({
  kind: z.literal('ramp'),
  rcd: Ref,
  tripMa: z.number().positive().max(30_000),
  at: InstantIn,
  note: Note.optional(),
})
export const ClampTestIn = z.object({
  kind: z.literal('clamp'),
  rcd: Ref,
  ma: z.number().min(0).max(60_000),
  off: z
    .array(Subject)
    .max(500)
    .default([])
    .meta({ description: 'what was off while this was read; everything else was on' }),
  at: InstantIn,
  note: Note.optional(),
})
export const TestIn = z.discriminatedUnion('kind', [InsulationTestIn, RampTestIn, ClampTestIn])

export const RemedyIn = z.object({
  at: InstantIn,
  of: Subject.optional(),
  rcd: Ref.optional(),
  done: Label.min(1),
  note: Note.optional(),
})

/** What every stored record carries beside its own fields. */
const Stored = z.object({
  id: z.string(),
  recordedAt: InstantOut,
  recordedBy: z.string().meta({ description: 'label of the key that posted it' }),
  corrections: z.int().meta({ description: 'how often it was corrected since' }),
})

/** One correction of a record: who, when, and what stood there before. */
export const Correction = z.object({
  at: InstantOut,
  by: z.string(),
  action: z.enum(['changed', 'deleted']),
  before: z.record(z.string(), z.unknown()),
})

export const TripOut = Stored.extend({
  rcd: z.string(),
  at: InstantOut.optional(),
  after: InstantOut.optional(),
  before: InstantOut.optional(),
  restoredAt: InstantOut.optional(),
  note: z.string().optional(),
  running: z.array(z.string()).optional(),
})
export const SwitchingOut = Stored.extend({
  of: z.string(),
  at: InstantOut,
  on: z.boolean(),
  note: z.string().optional(),
})
export const TimetableOut = Stored.extend({
  of: z.string(),
  onBetween: z.tuple([z.string(), z.string()]),
  days: z.array(Weekday),
  from: InstantOut.optional(),
  until: InstantOut.optional(),
  note: z.string().optional(),
})
export const InsulationTestOut = Stored.extend({
  kind: z.literal('insulation'),
  of: z.string(),
  between: z.string(),
  testVolts: z.number(),
  megohms: z.number(),
  atLeast: z.boolean(),
  loadsConnected: z.boolean(),
  surgePartsConnected: z.boolean(),
  at: InstantOut,
  note: z.string().optional(),
})
export const RampTestOut = Stored.extend({
  kind: z.literal('ramp'),
  rcd: z.string(),
  tripMa: z.number(),
  at: InstantOut,
  note: z.string().optional(),
})
export const ClampTestOut = Stored.extend({
  kind: z.literal('clamp'),
  rcd: z.string(),
  ma: z.number(),
  off: z.array(z.string()),
  at: InstantOut,
  note: z.string().optional(),
})
export const TestOut = z.discriminatedUnion('kind', [InsulationTestOut, RampTestOut, ClampTestOut])
export const RemedyOut = Stored.extend({
  at: InstantOut,
  of: z.string().optional(),
  rcd: z.string().optional(),
  done: z.string(),
  note: z.string().optional(),
})

export type TripOut = z.infer<typeof TripOut>
export type SwitchingOut = z.infer<typeof SwitchingOut>

/** The kinds of record a site keeps. */
export const RECORD_KINDS = ['trip', 'switching', 'timetable', 'test', 'remedy'] as const
export type RecordKind = (typeof RECORD_KINDS)[number]

/** Decoded bodies: instants are epoch ms. These are what the store keeps and the timeline reads. */
export type Trip = z.output<typeof TripIn>
export type Switching = z.output<typeof SwitchingIn>
export type Timetable = z.output<typeof TimetableIn>
export type SiteTest = z.output<typeof TestIn>
export type InsulationTest = z.output<typeof InsulationTestIn>
export type RampTest = z.output<typeof RampTestIn>
export type ClampTest = z.output<typeof ClampTestIn>
export type Remedy = z.output<typeof RemedyIn>

/** The decoded body of each kind. */
export interface RecordBodies {
  trip: Trip
  switching: Switching
  timetable: Timetable
  test: SiteTest
  remedy: Remedy
}
