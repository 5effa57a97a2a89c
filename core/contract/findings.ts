import { z } from 'zod'
import { InstantOut } from './primitives.ts'

const Hours = z.number().min(0)
const Milliamps = z.number()
const Probability = z.number().min(0).max(1)

/** A reason in plain words, the method behind it and the figures it rests on. */
export const Reason = z.object({
  text: z.string(),
  method: z.string().meta({ description: 'name of the method and its source' }),
  figures: z.record(z.string(), z.union([z.number(), z.string(), z.boolean(), z.null()])),
})

export const Gap = z.object({ channel: z.string(), from: InstantOut, to: InstantOut })

export const Coverage = z.object({
  energisedHours: Hours,
  readingHours: Hours.meta({ description: 'energised hours with leakage readings' }),
  trips: z.int(),
  gaps: z.array(Gap),
})

export const Headroom = z.object({
  tripMa: z.object({
    value: Milliamps,
    low: Milliamps,
    high: Milliamps,
    basis: z.enum(['ramp-tests', 'levels-at-trips', 'limits']),
  }),
  standingMa: z
    .object({ p5: Milliamps, p50: Milliamps, p95: Milliamps, max: Milliamps })
    .nullable()
    .meta({ description: 'time-weighted over energised time; null without readings' }),
  shareOfRating: z.number().nullable().meta({ description: 'median standing leakage over IΔn' }),
  advisedShare: z.number(),
  drift: z
    .object({ maPerDay: z.number(), low: z.number(), high: z.number(), p: z.number() })
    .nullable()
    .optional()
    .meta({ description: 'Theil-Sen slope of the level, Mann-Kendall p; null where data do not allow one' }),
  tail: z.object({ exceedMa: z.number(), perWeek: z.number(), shape: z.number() }).nullable().optional(),
})

export const BudgetLine = z.object({
  of: z.string(),
  ma: Milliamps.nullable(),
  low: Milliamps.nullable(),
  high: Milliamps.nullable(),
  basis: z.enum(['switching', 'survey', 'channel', 'unjudged']),
  switchings: z.int().meta({ description: 'changes of state behind the figure' }),
  note: z.string().optional(),
})

export const Share = z.object({ of: z.string(), ma: Milliamps })

export const TripFinding = z.object({
  id: z.string().nullable().meta({ description: 'null for a trip that the log proposes and nobody wrote down' }),
  at: InstantOut.nullable(),
  after: InstantOut.nullable(),
  before: InstantOut.nullable(),
  levelMa: Milliamps.nullable().meta({ description: 'last level before the trip' }),
  usualMa: Milliamps.nullable().meta({ description: 'median level of the hour before' }),
  course: z.enum(['creep', 'step', 'sudden', 'shared', 'unseen']),
  trigger: z
    .string()
    .nullable()
    .meta({ description: 'what changed within the delay that the course allows; null is a good answer' }),
  shares: z.array(Share),
  text: z.string(),
})

export const Grade = z.enum(['strong', 'fair', 'slight', 'cleared', 'unjudged'])
export const Role = z.enum(['trigger', 'contributor', 'both'])

export const Suspect = z.object({
  of: z.string().meta({
    description:
      'circuit:REF, load:REF, rain, temperature, clock, period, sun, load-current, standing, supply, device, unlisted or none',
  }),
  label: z.string(),
  probability: Probability,
  share: z.number().meta({ description: 'expected share of the trips it accounts for' }),
  grade: Grade,
  role: Role,
  because: z.array(Reason),
  next: z.string(),
  sameAs: z.array(z.string()).optional().meta({ description: 'suspects that the data cannot tell from this one' }),
  localTime: z.string().optional(),
  hours: z.number().optional(),
})

/** One test for a preference, in words and figures. */
export const Pattern = z.looseObject({
  verdict: z.string(),
  p: z.number().nullable().optional(),
  method: z.string().optional(),
})

export const TimedStep = z.object({
  ma: Milliamps,
  minutes: z.number(),
  count: z.int(),
  schedule: z.string(),
  localTime: z.string().optional(),
  hours: z.number().optional(),
  low: Milliamps.optional().meta({ description: 'lower quartile of the rises' }),
  high: Milliamps.optional().meta({ description: 'upper quartile of the rises' }),
  spreadMinutes: z.number().optional().meta({ description: 'nine of ten starts lie so near the schedule' }),
  kept: Probability.optional().meta({ description: 'share of the starts due that came while the log looked' }),
  p: z.number().optional(),
  method: z.string().optional(),
  localTimes: z.array(z.string()).optional().meta({ description: 'schedule clock: every start on the local day' }),
  days: z.array(z.string()).optional().meta({ description: 'schedule clock: the weekdays on which it runs' }),
  standsStill: z.boolean().optional().meta({ description: 'schedule period: its clock stands still without supply' }),
  event: z.enum(['sunset', 'sunrise']).optional().meta({ description: 'schedule sun: what it follows' }),
  offsetMinutes: z.number().optional().meta({ description: 'schedule sun: minutes after the event' }),
  text: z.string(),
})

export const Patterns = z.object({
  clock: Pattern,
  period: Pattern,
  sun: Pattern,
  rain: Pattern,
  temperature: Pattern,
  load: Pattern,
  humidity: Pattern.optional().meta({ description: 'relative humidity and dew point' }),
  weekday: Pattern.optional().meta({ description: 'weekdays against weekends, and single days of the week' }),
  level: Pattern.optional().meta({ description: "the leakage level's own period" }),
  timedSteps: z.array(TimedStep),
})

export const NextStep = z.object({
  isolate: z
    .string()
    .nullable()
    .meta({ description: 'circuit:REF, load:REF, several joined by " + ", or null for a test or a longer stay' }),
  days: z.number(),
  settles: Probability.meta({ description: 'chance that the question is settled by then' }),
  text: z.string(),
})

export const Proof = z.object({
  remedyAt: InstantOut.nullable(),
  quietHours: z.number().nullable(),
  confidenceFixed: Probability.nullable(),
  hoursTo95: z.number().nullable(),
  text: z.string(),
})

/** The answer of one device over one span: the whole of it, in the order in which a person asks. */
export const Findings = z.object({
  rcd: z.string(),
  from: InstantOut,
  to: InstantOut,
  answer: z.object({ text: z.string(), sureness: Grade.nullable() }).meta({ description: 'one or two sentences' }),
  coverage: Coverage,
  headroom: Headroom,
  budget: z.array(BudgetLine),
  trips: z.array(TripFinding),
  suspects: z.array(Suspect),
  patterns: Patterns,
  next: z.array(NextStep),
  proof: Proof,
  notes: z.array(z.string()).meta({ description: 'what was missing, merged or set aside, in words' }),
})

export type Reason = z.infer<typeof Reason>
export type Coverage = z.infer<typeof Coverage>
export type Gap = z.infer<typeof Gap>
export type Headroom = z.infer<typeof Headroom>
export type BudgetLine = z.infer<typeof BudgetLine>
export type Share = z.infer<typeof Share>
export type TripFinding = z.infer<typeof TripFinding>
export type Grade = z.infer<typeof Grade>
export type Role = z.infer<typeof Role>
export type Suspect = z.infer<typeof Suspect>
export type Pattern = z.infer<typeof Pattern>
export type TimedStep = z.infer<typeof TimedStep>
export type Patterns = z.infer<typeof Patterns>
export type NextStep = z.infer<typeof NextStep>
export type Proof = z.infer<typeof Proof>
export type Findings = z.infer<typeof Findings>
