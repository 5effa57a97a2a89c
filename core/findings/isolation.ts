import type { BudgetLine, NextStep, Suspect } from '../contract/findings.ts'
import { type GammaBelief, gammaPoisson } from '../statistics/gamma-poisson.ts'
import { ruleOfThree } from '../statistics/rule-of-three.ts'
import type { Timeline } from '../timeline/timeline.ts'
import type { CauseSet } from './likely-sets.ts'
import { bestIsolations } from './next/best-isolations.ts'
import { carriers } from './next/carriers.ts'
import { isolationStep } from './next/isolation-step.ts'
import type { Site } from './next/isolations.ts'
import { ownTest } from './next/own-test.ts'
import { stayFor } from './next/stay.ts'
import { countOf, duration, figure, sentence } from './words.ts'

/** From this probability on a suspect leads. */
const LEADS = 0.6
/** From this one on nothing more need be caught. */
const SURE = 0.9
const MOST_ISOLATIONS = 3
/** Fewer trips than this prove almost nothing. */
const FEW_TRIPS = 4
/** A stay longer than this is no advice, days. */
const LONGEST_STAY = 120

/** What the line-up knows that the next steps follow from. */
export interface Lined {
  readonly suspects: readonly Suspect[]
  readonly sets: readonly CauseSet[]
  /** Trips that count. */
  readonly trips: number
  readonly budget: readonly BudgetLine[]
  /** Median standing leakage, mA; null without a log. */
  readonly standingMa: number | null
  /** The time of each suspect's likeliest window. */
  readonly windows: Parameters<typeof carriers>[1]
  /** What spreading the circuits over two devices would do, in words; null where nothing can be planned. */
  readonly spread?: string | null
}

/**
 * What to do next (methods.md §9): the own test of a leading suspect that no switch isolates; then the best isolations, by expected loss
 * of entropy of the line-up, with the days after which their question is settled with 90 % odds; how long the logger must stay; and
 * a ramp test where there was none.
 */
export function nextSteps(timeline: Timeline, hours: number, lined: Lined): NextStep[] {
  const { suspects, trips } = lined
  if (trips === 0 || hours <= 0) return [nothingYet(hours)]
  const belief = gammaPoisson(trips, hours)
  const steps: NextStep[] = []
  const leading = suspects[0]
  if (leading !== undefined && leading.probability >= LEADS && !/^(load:|circuit:|none$)/.test(leading.of)) {
    steps.push(ownTest(timeline, leading, belief, lined.spread ?? null))
  }
  const site = siteOf(timeline, lined)
  const sets = withUnjudged(lined)
  const proposals = bestIsolations(site, sets, trips, belief, MOST_ISOLATIONS)
  steps.push(...proposals.map((proposal) => isolationStep(timeline, proposal, belief)))
  const best = leading === undefined || leading.of === 'none' ? 0 : leading.probability
  if (proposals.length === 0 && best < SURE && timeline.things.length === 0) {
    steps.push(advise('No circuit is on the site sheet: enter circuits and loads, so that something can be isolated.'))
  }
  if (best < SURE || trips < FEW_TRIPS) steps.push(stay(timeline, belief, trips))
  if (!timeline.tests.some((t) => t.kind === 'ramp') && timeline.rcd.rampTripMa === undefined) {
    steps.push(
      advise(
        'Do a ramp test of the device: it replaces the guess of its trip current by a figure and shows whether the device itself is too sensitive.',
      ),
    )
  }
  return steps
}

function advise(text: string): NextStep {
  return { isolate: null, days: 0, settles: 0, text }
}

function nothingYet(hours: number): NextStep {
  const rare =
    hours > 0
      ? ` None in ${duration(hours)} under supply: with 95 % odds there are fewer than ${figure(ruleOfThree(hours) * 168)} a week.`
      : ''
  return advise(
    `Leave the logger on site until at least three trips were caught; before, there is nothing to isolate for.${rare}`,
  )
}

/** How long the logger must stay for one more trip and for three, with 90 % odds. */
function stay(timeline: Timeline, belief: GammaBelief, trips: number): NextStep {
  const [one, three] = [stayFor(belief, 1), stayFor(belief, 3)]
  const days = Math.ceil(one / 24)
  const seen = `${sentence(countOf(trips, 'trip'))} so far`
  if (days > LONGEST_STAY) {
    return advise(
      `${seen}: at that rate one more is caught with 90 % odds only after ${duration(one)}. Write trips and switchings down instead, and isolate one circuit after another.`,
    )
  }
  const rest = three / 24 > LONGEST_STAY ? '' : `, three more in ${duration(three)}`
  return {
    isolate: null,
    days,
    settles: 0,
    text: `${timeline.leakage === null ? 'Put a leakage logger on the tails of this device' : 'Leave the logger on site'}: it catches at least one more trip in ${duration(one)} with 90 % odds${rest}.`,
  }
}

function siteOf(timeline: Timeline, { budget, standingMa, windows }: Lined): Site {
  const standing = new Map<string, number>()
  for (const line of budget) {
    if (line.of.startsWith('circuit:') && line.ma !== null && standingMa !== null && standingMa > 0)
      standing.set(line.of.slice('circuit:'.length), Math.max(0, line.ma) / standingMa)
  }
  return {
    timeline,
    things: new Map(timeline.things.map((thing) => [thing.of, thing])),
    circuits: timeline.rcd.circuits.map((c) => c.ref),
    standing,
    carriers: carriers(timeline, windows),
  }
}

/** A thing that nothing is known of may be behind the trips too: it takes its probability out of those without a cause. */
function withUnjudged({ suspects, sets, trips }: Lined): CauseSet[] {
  const seen = new Set(sets.flatMap((set) => set.of))
  const none = sets.find((set) => set.of.length === 0)
  const silent = suspects.filter((s) => /^(load:|circuit:)/.test(s.of) && s.grade === 'unjudged' && !seen.has(s.of))
  const wanted = silent.reduce((sum, s) => sum + s.probability, 0)
  if (none === undefined || wanted <= 0) return [...sets]
  const scale = Math.min(1, (0.9 * none.weight) / wanted)
  return [
    ...sets.map((set) => (set === none ? { ...none, weight: none.weight - scale * wanted } : set)),
    ...silent.map((s) => ({ of: [s.of], weight: scale * s.probability, expected: [trips] })),
  ]
}
