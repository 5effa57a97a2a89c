import type { BudgetLine, Share } from '../contract/findings.ts'
import { stateBefore } from '../timeline/exposure.ts'
import { GAP_INTERVALS, lowerBound, usualInterval } from '../timeline/series.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import { rounded } from './words.ts'

/**
 * Who made up the level at a trip, by the budget of what was known to be on, the largest first. A circuit's figure
 * holds what ran on it when it was measured; what its loads account for is taken off it, so that the shares add up. A circuit with its own
 * clamp counts with what that read just before.
 */
export function sharesAt(timeline: Timeline, at: number, lines: readonly BudgetLine[]): Share[] {
  const byOf = new Map(lines.map((line) => [line.of, line]))
  const loads = new Map<string, Thing[]>()
  for (const thing of timeline.things) {
    if (thing.kind === 'load') loads.set(thing.circuit, [...(loads.get(thing.circuit) ?? []), thing])
  }
  const shares: Share[] = []
  for (const thing of timeline.things) {
    const line = byOf.get(thing.of)
    if (line === undefined || line.ma === null || stateBefore(thing.state, at) !== 'on') continue
    const seen = line.basis === 'channel' ? lastReading(thing, at) : null
    const own =
      (seen ?? line.baseMa ?? line.ma) - ridingMa(timeline, thing, line, seen === null ? null : at, loads, byOf)
    if (own > 0) shares.push({ of: thing.of, ma: rounded(own) })
  }
  return shares.sort((a, b) => b.ma - a.ma || (a.of < b.of ? -1 : 1))
}

/** Last reading of a thing's own clamp before the trip; null when none is near. */
function lastReading({ leakage }: Thing, at: number): number | null {
  if (leakage === null) return null
  const i = lowerBound(leakage.t, at) - 1
  return i >= 0 && at - leakage.t[i]! <= GAP_INTERVALS * usualInterval(leakage) ? leakage.v[i]! : null
}

/**
 * What known loads add to a circuit's figure, mA: by its own clamp those on `at` the trip, by a survey those on at the readings. A
 * figure for the circuit with nothing running holds none.
 */
function ridingMa(
  timeline: Timeline,
  thing: Thing,
  line: BudgetLine,
  at: number | null,
  loadsOf: ReadonlyMap<string, readonly Thing[]>,
  byOf: ReadonlyMap<string, BudgetLine>,
): number {
  if (thing.kind === 'load' || (at === null && line.baseMa !== undefined)) return 0
  const loads = loadsOf.get(thing.circuit) ?? []
  const when =
    at !== null
      ? [at]
      : timeline.tests.flatMap((test) => (test.kind === 'clamp' && test.off.includes(thing.of) ? [test.at] : []))
  if (when.length === 0) return 0
  let sum = 0
  for (const at of when) {
    for (const load of loads) {
      if (stateBefore(load.state, at) === 'on') sum += Math.max(0, byOf.get(load.of)?.ma ?? 0)
    }
  }
  return sum / when.length
}
