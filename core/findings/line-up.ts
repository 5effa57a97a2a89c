import { CoreError } from '../errors.ts'
import type { Spans } from '../timeline/spans.ts'
import { type CauseWindow, marginals } from './cause-sets.ts'
import { type CauseSet, likelySets } from './likely-sets.ts'

/** One way in which a suspect may act, with what the trips say about it. */
export interface ExposureWindow {
  /** Short name within the suspect: `on`, `after-on-3`, `02:40+20`. */
  readonly key: string
  /** In words, to follow "trips fell …": `within 3 minutes of its start`. */
  readonly words: string
  /** Prior weight among the windows of its suspect; they sum to 1. */
  readonly prior: number
  /** Exposed energised hours under each habit of the site, times what an hour of them weighs. */
  readonly hoursBy: readonly number[]
  /** `CauseWindow.weights` under each habit. */
  readonly weightsBy: readonly Float64Array[]
  /** What is spoken of: share of each trip's time inside, before leakage evidence (0, 1, or between), and hours inside. */
  readonly inside: Float64Array
  readonly insideHours: number
  /** Energised time in which it holds, and in which that is known; absent where it is no one set of time. */
  readonly when?: { readonly inside: Spans; readonly known: Spans }
}

/** A way in which trips of any cause may spread over the day, with what they say for it. */
export interface Pace {
  readonly prior: number
  readonly logDensity: number
}

const EVEN: readonly Pace[] = [{ prior: 1, logDensity: 0 }]

export interface Candidate {
  readonly of: string
  /** Prior odds of being a cause. */
  readonly odds: number
  readonly windows: readonly ExposureWindow[]
  /** Keeps hours of its own: what people do over the day does not bear on it. */
  readonly ownHours?: boolean
  /** It explains all trips or none: never in a set with another. */
  readonly alone?: boolean
  /** Suspects of one family are the same thing under several names: never two of them in one set. */
  readonly family?: string
  /** The suspect that this one is part of (a load of its circuit): never both in one set. */
  readonly partOf?: string
}

export interface Standing {
  readonly of: string
  /** Posterior probability of being a cause. */
  readonly probability: number
  /** Expected share of the trips it accounts for. */
  readonly share: number
  /** Its windows by posterior weight, heaviest first, at most five. */
  readonly windows: readonly { readonly window: ExposureWindow; readonly weight: number }[]
  /** Natural log of the evidence as a single cause over that of no cause. */
  readonly logBayesFactor: number
}

export interface LineUp {
  /** In the order of the candidates. */
  readonly standings: readonly Standing[]
  /** Probability that no candidate is a cause. */
  readonly none: number
  /** Expected share of trips that no candidate accounts for. */
  readonly unexplained: number
  /** What may be the case, heaviest first, without what is less likely than one in ten thousand; weights sum to 1. */
  readonly sets: readonly CauseSet[]
}

/**
 * Chance that the model itself is wrong: halves with every trip, and never below this. With that chance nothing was
 * learnt, and the prior stands: three trips cannot make anything certain, however well they fit.
 */
const LEAST_DOUBT = 0.01

/** Each cause beyond the first is so much rarer still: two faults at once are no coincidence of two ordinary ones. */
const EXTRA_CAUSE = 0.04

/** Trips of which no listed thing is the cause are so much rarer than the odds of the suspects alone say. */
const NO_CAUSE = 0.4

/** How many windows of a suspect go on to sets of two and three, and how many suspects. */
const WINDOWS_IN_PAIRS = 3
const WINDOWS_IN_TRIPLES = 2
const SUSPECTS_IN_PAIRS = 12
const SUSPECTS_IN_TRIPLES = 5

/** A habit less likely than the best by so many powers of e is left out of larger sets. */
const HOPELESS = 7

interface Weighed {
  readonly members: readonly number[]
  readonly windows: readonly ExposureWindow[]
  readonly logWeight: number
  /** Expected number of trips that each member made. */
  readonly expected: readonly number[]
}

/**
 * Bayesian variable selection over sets of at most three causes of a point process: each suspect adds a gamma-
 * distributed intensity while its exposure holds, windows are averaged over, sets without hope are left out
 * (Occam's window: Madigan & Raftery 1994). `hours` is energised time, `trips` their number, `paces` the habits under which
 * exposures were measured, the first of them a flat day; averaged over. Independent of the order of trips and candidates up to rounding. Cost: windows ×
 * trips² and a bounded number of sets.
 *
 * @throws {CoreError} out_of_range without time, unequal_lengths when a window does not weigh every trip
 */
export function lineUp(
  hours: number,
  trips: number,
  candidates: readonly Candidate[],
  paces: readonly Pace[] = EVEN,
): LineUp {
  if (!(hours > 0)) throw new CoreError('out_of_range', `lineUp needs energised hours, got ${hours}`)
  for (const { windows } of candidates) {
    for (const w of windows) {
      for (const { length } of w.weightsBy) {
        if (length !== trips) throw new CoreError('unequal_lengths', `lineUp got ${length} weights for ${trips} trips`)
      }
    }
  }
  const sets: Weighed[] = []
  const byPace: number[][] = paces.map(() => [])
  let asked = paces.map((_, k) => k)
  const add = (members: readonly number[], windows: readonly ExposureWindow[]): number => {
    const ownHours = members.some((c) => candidates[c]!.ownHours === true)
    const { log, expected, each } = overPaces(hours, trips, windows, ownHours ? EVEN : paces, ownHours ? [0] : asked)
    let logWeight = log + (members.length === 0 ? Math.log(NO_CAUSE) : (members.length - 1) * Math.log(EXTRA_CAUSE))
    for (const c of members) logWeight += Math.log(candidates[c]!.odds)
    for (const w of windows) logWeight += Math.log(w.prior)
    for (const m of each) byPace[m.pace]!.push(logWeight - log + m.log)
    sets.push({ members, windows, logWeight, expected })
    return logWeight
  }
  const emptyLog = add([], [])

  const singles = candidates.map((candidate, c) => {
    const scored = candidate.windows.map((window) => ({ window, log: add([c], [window]) }))
    scored.sort((a, b) => b.log - a.log)
    return { c, scored, log: logSum(scored.map((s) => s.log)) }
  })
  const ranked = singles.filter((s) => s.scored.length > 0 && s.log > Number.NEGATIVE_INFINITY)
  ranked.sort((a, b) => b.log - a.log || a.c - b.c)

  const best = (s: (typeof ranked)[number], n: number): ExposureWindow[] => s.scored.slice(0, n).map((x) => x.window)
  // sets of several need no habit that single causes and chance have ruled out
  const mass = byPace.map(logSum)
  const most = Math.max(...mass)
  asked = asked.filter((k) => mass[k]! > most - HOPELESS)

  const isOneThing = (a: (typeof ranked)[number], b: (typeof ranked)[number]): boolean =>
    areOneThing(candidates[a.c]!, candidates[b.c]!)
  const inPairs = ranked.slice(0, SUSPECTS_IN_PAIRS)
  for (let i = 0; i < inPairs.length; i++) {
    for (let j = i + 1; j < inPairs.length; j++) {
      if (isOneThing(inPairs[i]!, inPairs[j]!)) continue
      for (const a of best(inPairs[i]!, WINDOWS_IN_PAIRS)) {
        for (const b of best(inPairs[j]!, WINDOWS_IN_PAIRS)) add([inPairs[i]!.c, inPairs[j]!.c], [a, b])
      }
    }
  }
  const inTriples = ranked.slice(0, SUSPECTS_IN_TRIPLES)
  for (let i = 0; i < inTriples.length; i++) {
    for (let j = i + 1; j < inTriples.length; j++) {
      for (let k = j + 1; k < inTriples.length; k++) {
        if (isOneThing(inTriples[i]!, inTriples[j]!)) continue
        if (isOneThing(inTriples[i]!, inTriples[k]!) || isOneThing(inTriples[j]!, inTriples[k]!)) continue
        for (const a of best(inTriples[i]!, WINDOWS_IN_TRIPLES)) {
          for (const b of best(inTriples[j]!, WINDOWS_IN_TRIPLES)) {
            for (const d of best(inTriples[k]!, WINDOWS_IN_TRIPLES)) {
              add([inTriples[i]!.c, inTriples[j]!.c, inTriples[k]!.c], [a, b, d])
            }
          }
        }
      }
    }
  }
  return summarise(trips, candidates, sets, emptyLog - Math.log(NO_CAUSE))
}

function areOneThing(a: Candidate, b: Candidate): boolean {
  if (a.alone === true || b.alone === true) return true
  return (a.family !== undefined && a.family === b.family) || a.partOf === b.of || b.partOf === a.of
}

/** The marginal likelihood of one set under each habit, and averaged over them. */
interface Averaged {
  readonly log: number
  readonly expected: readonly number[]
  /** Of each habit that was asked, its prior included. */
  readonly each: readonly { readonly pace: number; readonly log: number }[]
}

function overPaces(
  hours: number,
  trips: number,
  windows: readonly ExposureWindow[],
  paces: readonly Pace[],
  asked: readonly number[],
): Averaged {
  // many windows (every period) are the same under all habits
  const same = windows.every(
    (w) => w.weightsBy.every((x) => x === w.weightsBy[0]) && w.hoursBy.every((h) => h === w.hoursBy[0]),
  )
  const ways = same && asked.length > 0 ? asked.slice(0, 1) : asked
  const found = marginals(
    hours,
    trips,
    ways.map((k) => windows.map((w): CauseWindow => ({ hours: w.hoursBy[k]!, weights: w.weightsBy[k]! }))),
  )
  const each = asked.map((k, place) => {
    const m = found[same ? 0 : place]!
    return { pace: k, log: m.log + paces[k]!.logDensity + Math.log(paces[k]!.prior), expected: m.expected }
  })
  const log = logSum(each.map((m) => m.log))
  const expected = windows.map((_, j) => each.reduce((sum, m) => sum + Math.exp(m.log - log) * m.expected[j]!, 0))
  return { log, expected, each }
}

function summarise(
  trips: number,
  candidates: readonly Candidate[],
  sets: readonly Weighed[],
  emptyLog: number,
): LineUp {
  const total = logSum(sets.map((s) => s.logWeight))
  const probability = new Float64Array(candidates.length)
  const share = new Float64Array(candidates.length)
  const perWindow = candidates.map(() => new Map<ExposureWindow, number>())
  const single = candidates.map(() => [] as number[])
  const doubt = Math.max(LEAST_DOUBT, 0.5 ** trips)
  let priorNone = 1
  for (const { odds } of candidates) priorNone /= 1 + odds
  let none = 0
  for (const set of sets) {
    const p = Math.exp(set.logWeight - total)
    if (set.members.length === 0) none += p
    set.members.forEach((c, place) => {
      probability[c]! += p
      if (trips > 0) share[c]! += (p * set.expected[place]!) / trips
      const windows = perWindow[c]!
      windows.set(set.windows[place]!, (windows.get(set.windows[place]!) ?? 0) + p)
    })
    if (set.members.length === 1) {
      const c = set.members[0]!
      single[c]!.push(set.logWeight - Math.log(candidates[c]!.odds))
    }
  }
  let explained = 0
  for (const s of share) explained += s
  const standings = candidates.map((candidate, c): Standing => {
    const weight = probability[c]! > 0 ? probability[c]! : 1
    const windows = [...perWindow[c]!].map(([window, p]) => ({ window, weight: p / weight }))
    windows.sort((a, b) => b.weight - a.weight || (a.window.key < b.window.key ? -1 : 1))
    return {
      of: candidate.of,
      probability: (1 - doubt) * Math.min(1, probability[c]!) + (doubt * candidate.odds) / (1 + candidate.odds),
      share: share[c]!,
      windows: windows.slice(0, 5),
      logBayesFactor: logSum(single[c]!) - emptyLog,
    }
  })
  return {
    standings,
    none: (1 - doubt) * none + doubt * priorNone,
    unexplained: Math.max(0, 1 - explained),
    sets: likelySets(
      trips,
      candidates,
      sets.map((set) => ({ ...set, weight: Math.exp(set.logWeight - total) })),
      { doubt, priorNone },
    ),
  }
}

/** ln Σ exp(xᵢ) without overflow; −∞ for an empty list. */
function logSum(logs: readonly number[]): number {
  let top = Number.NEGATIVE_INFINITY
  for (const x of logs) if (x > top) top = x
  if (top === Number.NEGATIVE_INFINITY) return top
  let sum = 0
  for (const x of logs) sum += Math.exp(x - top)
  return top + Math.log(sum)
}
