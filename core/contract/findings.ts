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
  tail: z
    .object({
      exceedMa: z.number().meta({ description: 'the trip current that the tail is asked about' }),
      perWeek: z.number().meta({ description: 'expected spells above it in a week under supply' }),
      shape: z.number().meta({ description: 'of the generalised Pareto: below 0 a tail with an end' }),
      low: z.number().optional().meta({ description: 'perWeek, 90 % interval' }),
      high: z.number().optional(),
      scale: z.number().optional().meta({ description: 'of the generalised Pareto, mA' }),
      thresholdMa: z.number().optional().meta({ description: 'the tail is fitted above it' }),
      spells: z.int().optional().meta({ description: 'spells above the threshold that the fit rests on' }),
    })
    .nullable()
    .optional()
    .meta({ description: 'beyond the log: null where the data are not enough to fit a tail' }),
})

const BudgetSource = z.enum(['switching', 'survey', 'channel'])

export const BudgetLine = z.object({
  of: z.string(),
  ma: Milliamps.nullable(),
  low: Milliamps.nullable(),
  high: Milliamps.nullable(),
  basis: z.enum(['switching', 'survey', 'channel', 'unjudged']),
  switchings: z.int().meta({ description: 'changes of state behind the figure' }),
  note: z.string().optional(),
  baseMa: Milliamps.optional().meta({ description: 'of a circuit: what stays while none of its known loads runs' }),
  conductiveMa: Milliamps.optional().meta({ description: 'its own part in phase, where both parts are logged' }),
  conductiveLow: Milliamps.optional(),
  conductiveHigh: Milliamps.optional(),
  capacitiveMa: Milliamps.optional().meta({ description: 'its own part a quarter period ahead' }),
  capacitiveLow: Milliamps.optional(),
  capacitiveHigh: Milliamps.optional(),
  ownLow: Milliamps.optional().meta({
    description: 'least its own current can be: magnitudes alone bound it, both parts measure it',
  }),
  ownHigh: Milliamps.optional().meta({ description: 'most its own current can be' }),
  neutralStays: z
    .boolean()
    .optional()
    .meta({ description: 'its device opens the line only: what leaks from its neutral is not in the figure' }),
  fallback: z
    .boolean()
    .optional()
    .meta({ description: 'from levels while on and off, without a usable switching: the weaker basis' }),
  sources: z
    .array(z.object({ basis: BudgetSource, ma: Milliamps, low: Milliamps, high: Milliamps }))
    .optional()
    .meta({ description: 'what each kind of evidence says by itself, where there are several' }),
  disagree: z.boolean().optional().meta({ description: 'the sources differ by more than their intervals allow' }),
})

export const InsulationLine = z.object({
  of: z.string(),
  megohms: z.number(),
  atLeast: z.boolean().meta({ description: 'full scale: a lower bound of MΩ, an upper bound of mA' }),
  ma: Milliamps.nullable().meta({ description: 'U/R at the nominal voltage; null for a dead short' }),
  withoutMegohms: z.number().nullable().meta({ description: 'resultant of all others; null where it is the only one' }),
  flag: z.enum(['below-limit', 'investigate', 'surge-parts', 'sound']),
  text: z.string(),
})

/** What insulation tests explain of the standing leakage. */
export const InsulationFindings = z.object({
  volts: z.number().meta({ description: 'nominal voltage of the supply' }),
  resultantMegohms: z.number(),
  atLeast: z.boolean(),
  ma: Milliamps.nullable().meta({ description: 'conduction current of the resultant' }),
  standingMa: Milliamps.nullable(),
  explainedShare: z
    .number()
    .nullable()
    .meta({ description: 'of the standing level, part in phase: √(level² − ma²) is missing' }),
  capacitiveMa: Milliamps.nullable().meta({ description: 'what the tests do not show, when the rest is capacitive' }),
  untested: z.array(z.string()).meta({ description: 'circuits without a usable test' }),
  lines: z.array(InsulationLine),
  text: z.string(),
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
  settlesByBreaker: Probability.optional().meta({
    description:
      'the same when only the breakers are opened, which leaves the neutral connected; only where that differs',
  }),
  bits: z.number().optional().meta({ description: 'expected loss of entropy of the line-up, bits' }),
})

/** Trips per energised time before and after a remedy. */
export const RateChange = z.object({
  tripsBefore: z.int(),
  hoursBefore: Hours,
  tripsAfter: z.int(),
  hoursAfter: Hours,
  ratio: z.number().nullable().meta({ description: 'rate after over rate before; null where it is not finite' }),
  low: z.number().nullable().meta({ description: '90 % limits, exact' }),
  high: z.number().nullable(),
  p: Probability.meta({ description: 'one-sided: chance of so few trips after it had nothing changed' }),
})

/** Standing leakage before and after a remedy, at the same hours of the day, drift taken off. */
export const LevelChange = z.object({
  beforeMa: Milliamps,
  afterMa: Milliamps,
  changeMa: Milliamps.meta({ description: 'negative: less than before' }),
  low: Milliamps.meta({ description: '90 % limits, day by day' }),
  high: Milliamps,
  driftMaPerDay: z.number().nullable().meta({ description: 'drift before the remedy that was taken off; null: none' }),
  method: z.string(),
})

/** What is known of one remedy: set against the time since the remedy before it, up to the next one. */
export const RemedyProof = z.object({
  remedyAt: InstantOut,
  of: z.string().nullable(),
  done: z.string(),
  quietHours: Hours.meta({ description: 'energised hours without a trip at the end of its time' }),
  confidenceFixed: Probability.nullable(),
  rate: RateChange.nullable(),
  level: LevelChange.nullable(),
  text: z.string(),
})

export const Proof = z.object({
  remedyAt: InstantOut.nullable(),
  quietHours: z.number().nullable(),
  confidenceFixed: Probability.nullable(),
  hoursTo95: z.number().nullable(),
  text: z.string(),
  rate: RateChange.nullable().optional(),
  level: LevelChange.nullable().optional(),
  newCause: Reason.nullable().optional().meta({ description: 'signs that something else makes it trip since then' }),
  remedies: z.array(RemedyProof).optional().meta({ description: 'every remedy in order of time' }),
})

/** Superposed epochs: the mean course of the leakage before trips, beside the same hours of the day without a trip. */
export const Epochs = z.object({
  trips: z.int().meta({ description: 'trips with a known instant and a log before it' }),
  minutes: z.array(z.number()).meta({ description: 'time from the trip, negative; middle of each stretch' }),
  ma: z.array(Milliamps.nullable()).meta({ description: 'mean over the trips' }),
  low: z.array(Milliamps.nullable()).meta({
    description: 'nine of ten such sets of times without a trip lie between low and high throughout',
  }),
  high: z.array(Milliamps.nullable()),
  text: z.string(),
  method: z.string(),
})

/** Circuits over several devices, so that the most loaded one stays least. */
export const SpreadPlan = z.object({
  devices: z.array(
    z.object({ of: z.array(z.string()), ma: Milliamps, highMa: Milliamps, share: z.number().optional() }),
  ),
  worstMa: Milliamps.meta({ description: 'upper end of the most loaded device' }),
  exact: z.boolean(),
  text: z.string(),
})

export const Spread = z.object({
  circuits: z.array(z.object({ of: z.string(), ma: Milliamps, highMa: Milliamps })),
  unjudged: z.array(z.string()).meta({ description: 'circuits without a figure, in no plan' }),
  unplacedMa: Milliamps.nullable().meta({ description: 'standing leakage that no circuit accounts for' }),
  nowShare: z.number().nullable().meta({ description: 'standing leakage of the device as it is, over its rating' }),
  advisedShare: z.number(),
  plans: z.array(SpreadPlan).meta({ description: 'two devices, then three' }),
  alone: z.array(
    z.object({
      of: z.string(),
      ma: Milliamps,
      share: z.number().meta({ description: 'on its own RCBO of the same rating' }),
      restMa: Milliamps,
      restShare: z.number(),
    }),
  ),
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
  insulation: InsulationFindings.nullable().optional().meta({ description: 'null without a usable insulation test' }),
  trips: z.array(TripFinding),
  suspects: z.array(Suspect),
  patterns: Patterns,
  next: z.array(NextStep),
  proof: Proof,
  epochs: Epochs.optional(),
  spread: Spread.optional(),
  notes: z.array(z.string()).meta({ description: 'what was missing, merged or set aside, in words' }),
})

export type Reason = z.infer<typeof Reason>
export type Coverage = z.infer<typeof Coverage>
export type Gap = z.infer<typeof Gap>
export type Headroom = z.infer<typeof Headroom>
export type BudgetLine = z.infer<typeof BudgetLine>
export type InsulationLine = z.infer<typeof InsulationLine>
export type InsulationFindings = z.infer<typeof InsulationFindings>
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
export type RateChange = z.infer<typeof RateChange>
export type LevelChange = z.infer<typeof LevelChange>
export type RemedyProof = z.infer<typeof RemedyProof>
export type Epochs = z.infer<typeof Epochs>
export type SpreadPlan = z.infer<typeof SpreadPlan>
export type SpreadFindings = z.infer<typeof Spread>
export type Findings = z.infer<typeof Findings>
