import type { LevelChange, Proof, RemedyProof, TripFinding } from '../contract/findings.ts'
import { writeInstant } from '../contract/primitives.ts'
import { gammaPoisson, noEventProbability, predictiveCdf, quietExposure } from '../statistics/gamma-poisson.ts'
import { ruleOfThree } from '../statistics/rule-of-three.ts'
import { measureWithin } from '../timeline/spans.ts'
import type { Timeline, TimelineTrip } from '../timeline/timeline.ts'
import { episodes } from './episodes.ts'
import { levelChange } from './proving/level-change.ts'
import { newCause } from './proving/new-cause.ts'
import { rateChange, type Sides, sidesOf } from './proving/rate-change.ts'
import type { SpokenWindow } from './suspects.ts'
import { countOf, current, duration, figure, nameOf, rounded, sentence } from './words.ts'

const HOUR_MS = 3_600_000
const SURE = 0.95
/** A rate that rests on fewer trips than this between two remedies is told from a longer time before. */
const TRIPS_FOR_RATE = 3
/** Remedies closer than this under supply cannot be told apart. */
const TOGETHER_HOURS = 24
/** Of many remedies the latest are listed. */
const MOST_LISTED = 12
const NOTHING: Proof = {
  remedyAt: null,
  quietHours: null,
  confidenceFixed: null,
  hoursTo95: null,
  text: 'No remedy is recorded. Write down what was done and when: the quiet time since is then weighed against the trips before.',
}

type Remedy = Timeline['remedies'][number]

/** What the numbers say of a spell since a remedy. */
interface Verdict {
  readonly quiet: number
  readonly confidence: number | null
  readonly hoursTo95: number | null
  readonly text: string
}

/**
 * Is it fixed (methods.md §10): energised hours without a trip since the latest remedy, the chance of that spell had nothing
 * changed, and the hours still needed for 95 %; the rate before is a gamma–Poisson belief with Jeffreys' prior. Beside it the rates and
 * the standing leakage before and after, signs of a new cause, and every remedy set against the time since the one before it. Hours
 * without supply never count. `found` are the findings of the timeline's trips, in their order,
 * `leading` the time in which the first suspect may act.
 */
export function proof(
  timeline: Timeline,
  found: readonly TripFinding[] = [],
  leading: SpokenWindow | null = null,
): Proof {
  const remedies = ownRemedies(timeline)
  const latest = remedies.at(-1)
  if (latest === undefined) return NOTHING
  const trips = episodes(timeline.trips)
  const { at } = latest
  const { from, reached } = beginningOf(timeline, trips, remedies, remedies.length - 1)
  const sides = sidesOf(timeline, trips, from, at, timeline.to)
  const verdict = verdictOf(timeline, sides, timeline.to)
  const listed = [...remedies.keys()].slice(-MOST_LISTED).map((i) => oneByOne(timeline, trips, remedies, i))
  const level = listed.at(-1)?.level ?? null
  const cause = newCause(timeline, { sides, of: latest.of ?? null, at, to: timeline.to, level, found, leading })
  const texts = [
    verdict.text,
    acrossText(sides),
    reached ? 'The rate before is that of the time before the remedies in between, for too few trips came since.' : '',
    levelText(timeline, level),
    cause?.text ?? '',
  ]
  return {
    remedyAt: writeInstant(at),
    quietHours: rounded(verdict.quiet),
    confidenceFixed: verdict.confidence,
    hoursTo95: verdict.hoursTo95,
    text: texts.filter((text) => text !== '').join(' '),
    rate: rateChange(sides),
    level,
    newCause: cause,
    remedies: listed,
  }
}

/** Remedies of this device, its circuits or loads, within the span, by time; those of nothing in particular count too. */
function ownRemedies(timeline: Timeline): Remedy[] {
  const own = new Set(timeline.things.map((thing) => thing.of))
  return timeline.remedies
    .filter((r) => (r.of !== undefined ? own.has(r.of) : r.rcd === undefined || r.rcd === timeline.rcd.ref))
    .filter((r) => r.at < timeline.to)
    .sort((a, b) => a.at - b.at || (a.id < b.id ? -1 : 1))
}

/**
 * From where the rate before a remedy counts: the remedy before it, or as far back as it takes to hold three trips. `reached` says that it
 * went past another remedy.
 */
function beginningOf(
  timeline: Timeline,
  trips: readonly TimelineTrip[],
  remedies: readonly Remedy[],
  index: number,
): { from: number; reached: boolean } {
  const at = remedies[index]!.at
  for (let k = index - 1; k >= 0; k--) {
    const from = remedies[k]!.at
    if (trips.filter((t) => t.from >= from && t.to <= at).length >= TRIPS_FOR_RATE)
      return { from, reached: k < index - 1 }
  }
  return { from: Math.min(timeline.from, at), reached: index > 0 && remedies[0]!.at > timeline.from }
}

function verdictOf(timeline: Timeline, sides: Sides, to: number): Verdict {
  const { after, hoursAfter, hoursBefore } = sides
  const before = sides.before.length
  const last = after.at(-1)
  const quiet = last === undefined ? hoursAfter : measureWithin(timeline.energised, last.to, to) / HOUR_MS
  if (after.length > 0) {
    return { quiet, confidence: 0, hoursTo95: null, text: notFixed(before, hoursBefore, after.length, hoursAfter) }
  }
  if (before === 0 || hoursBefore <= 0) {
    const limit =
      quiet > 0 ? ` With 95 % odds there are now fewer than ${figure(ruleOfThree(quiet) * 168)} a week.` : ''
    return {
      quiet,
      confidence: null,
      hoursTo95: null,
      text: `No trip is recorded before the remedy, so the quiet ${duration(quiet)} since have nothing to be set against.${limit}`,
    }
  }
  const belief = gammaPoisson(before, hoursBefore)
  const unchanged = noEventProbability(belief, quiet)
  const left = Math.max(0, quietExposure(belief, 1 - SURE) - quiet)
  const rest = left > 0 ? ` ${sentence(duration(left))} more without one make it 95 %.` : ''
  return {
    quiet,
    confidence: rounded(1 - unchanged),
    hoursTo95: rounded(left),
    text: `${sentence(duration(quiet))} under supply without a trip since the remedy. Before it there were ${countOf(before, 'trip')} in ${duration(hoursBefore)}; had nothing changed, so long a quiet spell had a chance of ${figure(unchanged)}.${rest}`,
  }
}

function notFixed(before: number, hoursBefore: number, after: number, hoursAfter: number): string {
  const since = `${sentence(countOf(after, 'trip'))} in ${duration(hoursAfter)} since the remedy: it is not fixed.`
  if (before === 0 || hoursBefore <= 0) return since
  const chance = predictiveCdf(gammaPoisson(before, hoursBefore), hoursAfter, after)
  const fewer =
    chance < 1 - SURE
      ? ` Fewer than before all the same: so few had a chance of ${figure(chance)} had nothing changed.`
      : ''
  return `${since} Before it there were ${countOf(before, 'trip')} in ${duration(hoursBefore)}.${fewer}`
}

function acrossText({ across }: Sides): string {
  if (across.length === 0) return ''
  const [lies, counts] = across.length === 1 ? ['lies', 'counts'] : ['lie', 'count']
  return `${sentence(countOf(across.length, 'trip'))} ${lies} somewhere round the remedy and ${counts} on neither side.`
}

function levelText(timeline: Timeline, level: LevelChange | null): string {
  if (level === null) {
    return timeline.leakage === null
      ? ''
      : 'Two days of readings on both sides would show what the remedy did to the standing leakage.'
  }
  const limits = `90 % limits ${signed(level.low)} to ${signed(level.high)} mA`
  const drift =
    level.driftMaPerDay === null ? '' : `, the drift before it of ${signed(level.driftMaPerDay)} mA a day taken off`
  const change = level.high < 0 ? 'fell by' : level.low > 0 ? 'rose by' : 'hardly changed, by'
  const ma = level.high < 0 || level.low > 0 ? current(Math.abs(level.changeMa)) : signed(level.changeMa)
  return `The standing leakage ${change} ${ma} mA (${limits}${drift}).`
}

function signed(ma: number): string {
  return `${ma < 0 ? '−' : '+'}${current(Math.abs(ma))}`
}

/** One remedy among several: from the one before it to the next one. */
function oneByOne(
  timeline: Timeline,
  trips: readonly TimelineTrip[],
  remedies: readonly Remedy[],
  index: number,
): RemedyProof {
  const { at, of, done } = remedies[index]!
  const to = remedies[index + 1]?.at ?? timeline.to
  const { from } = beginningOf(timeline, trips, remedies, index)
  const sides = sidesOf(timeline, trips, from, at, to)
  const verdict = verdictOf(timeline, sides, to)
  const level = levelChange(timeline, remedies[index - 1]?.at ?? timeline.from, at, to)
  const hours = measureWithin(timeline.energised, at, to) / HOUR_MS
  const follows = remedies[index + 1]
  const together =
    follows !== undefined && hours < TOGETHER_HOURS
      ? `${sentence(follows.done)} followed within ${duration(hours)} under supply: the two cannot be told apart.`
      : ''
  const what = of === undefined ? done : `${done} (${nameOf(timeline, of)})`
  return {
    remedyAt: writeInstant(at),
    of: of ?? null,
    done,
    quietHours: rounded(verdict.quiet),
    confidenceFixed: together === '' ? verdict.confidence : null,
    rate: rateChange(sides),
    level,
    text: `${sentence(what)}: ${[together === '' ? verdict.text : together, acrossText(sides), level === null ? '' : levelText(timeline, level)].filter((t) => t !== '').join(' ')}`,
  }
}
