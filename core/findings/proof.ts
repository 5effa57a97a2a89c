import type { Proof } from '../contract/findings.ts'
import { writeInstant } from '../contract/primitives.ts'
import { gammaPoisson, noEventProbability, predictiveCdf, quietExposure } from '../statistics/gamma-poisson.ts'
import { ruleOfThree } from '../statistics/rule-of-three.ts'
import { measureWithin } from '../timeline/spans.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { episodes } from './episodes.ts'
import { countOf, duration, figure, rounded, sentence } from './words.ts'

const HOUR_MS = 3_600_000
const SURE = 0.95

/**
 * Is it fixed (methods.md §10): energised hours without a trip since the latest remedy, the chance of that spell had
 * nothing changed, and the hours still needed for 95 %. The rate before is a gamma–Poisson belief with Jeffreys' prior.
 */
export function proof(timeline: Timeline): Proof {
  const remedyAt = latestRemedy(timeline)
  if (remedyAt === null) {
    return { remedyAt: null, quietHours: null, confidenceFixed: null, hoursTo95: null, text: 'No remedy is recorded.' }
  }
  const counted = episodes(timeline.trips)
  const before = counted.filter((trip) => trip.to <= remedyAt).length
  // A trip somewhere round the remedy says nothing either way.
  const after = counted.filter((trip) => trip.from >= remedyAt)
  const hoursBefore = measureWithin(timeline.energised, timeline.from, remedyAt) / HOUR_MS
  const hoursAfter = measureWithin(timeline.energised, remedyAt, timeline.to) / HOUR_MS
  const last = after.at(-1)
  const quiet = last === undefined ? hoursAfter : measureWithin(timeline.energised, last.to, timeline.to) / HOUR_MS
  const base = { remedyAt: writeInstant(remedyAt), quietHours: rounded(quiet) }
  if (after.length > 0) {
    return {
      ...base,
      confidenceFixed: 0,
      hoursTo95: null,
      text: notFixed(before, hoursBefore, after.length, hoursAfter),
    }
  }
  if (before === 0 || hoursBefore <= 0) {
    const limit =
      quiet > 0 ? ` With 95 % odds there are now fewer than ${figure(ruleOfThree(quiet) * 168)} a week.` : ''
    return {
      ...base,
      confidenceFixed: null,
      hoursTo95: null,
      text: `No trip is recorded before the remedy, so the quiet ${duration(quiet)} since have nothing to be set against.${limit}`,
    }
  }
  const belief = gammaPoisson(before, hoursBefore)
  const unchanged = noEventProbability(belief, quiet)
  const left = Math.max(0, quietExposure(belief, 1 - SURE) - quiet)
  const rest = left > 0 ? ` ${sentence(duration(left))} more without one make it 95 %.` : ''
  return {
    ...base,
    confidenceFixed: rounded(1 - unchanged),
    hoursTo95: rounded(left),
    text: `${sentence(duration(quiet))} under supply without a trip since the remedy. Before it there were ${countOf(before, 'trip')} in ${duration(hoursBefore)}; had nothing changed, so long a quiet spell had a chance of ${figure(unchanged)}.${rest}`,
  }
}

function notFixed(before: number, hoursBefore: number, after: number, hoursAfter: number): string {
  const since = `${sentence(countOf(after, 'trip'))} in ${duration(hoursAfter)} since the remedy: it is not fixed.`
  if (before === 0 || hoursBefore <= 0) return since
  const chance = predictiveCdf(gammaPoisson(before, hoursBefore), hoursAfter, after)
  const fewer =
    chance < 0.05
      ? ` Fewer than before all the same: so few had a chance of ${figure(chance)} had nothing changed.`
      : ''
  return `${since} Before it there were ${countOf(before, 'trip')} in ${duration(hoursBefore)}.${fewer}`
}

/** The latest remedy of this device, its circuits or loads, within the span; one of nothing in particular counts too. */
function latestRemedy(timeline: Timeline): number | null {
  const own = new Set(timeline.things.map((thing) => thing.of))
  let latest: number | null = null
  for (const remedy of timeline.remedies) {
    const meant =
      remedy.of !== undefined ? own.has(remedy.of) : remedy.rcd === undefined || remedy.rcd === timeline.rcd.ref
    if (meant && remedy.at < timeline.to && (latest === null || remedy.at > latest)) latest = remedy.at
  }
  return latest
}
