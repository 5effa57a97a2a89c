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
    const when = seen === null ? measuredAt(timeline, thing, line) : [at]
    const riding = thing.kind === 'circuit' ? ridingMa(loads.get(thing.circuit) ?? [], when, byOf) : 0
    const own = (seen ?? line.ma) - riding
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

/** Instants up to which the circuit stood as its figure describes it. */
function measuredAt(timeline: Timeline, thing: Thing, line: BudgetLine): number[] {
  if (line.basis === 'survey') {
    return timeline.tests.flatMap((test) => (test.kind === 'clamp' && test.off.includes(thing.of) ? [test.at] : []))
  }
  // A load that comes on with its circuit is on just after, one that goes off with it just before.
  return thing.changes.map(({ at, on }) => (on ? at + 2 : at))
}

/** Mean of what known loads added at those instants, mA. */
function ridingMa(loads: readonly Thing[], when: readonly number[], byOf: ReadonlyMap<string, BudgetLine>): number {
  if (when.length === 0) return 0
  let sum = 0
  for (const at of when) {
    for (const load of loads) {
      if (stateBefore(load.state, at) === 'on') sum += Math.max(0, byOf.get(load.of)?.ma ?? 0)
    }
  }
  return sum / when.length
}
