import type { BudgetLine, Share } from '../contract/findings.ts'
import { stateBefore } from '../timeline/exposure.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import { rounded } from './words.ts'

/**
 * Who made up the level at a trip, by the budget of what was known to be on, the largest first. A circuit's figure
 * holds what ran on it when it was switched; what its loads account for is taken off it, so that the shares add up.
 */
export function sharesAt(timeline: Timeline, at: number, lines: readonly BudgetLine[]): Share[] {
  const figures = new Map(lines.map((line) => [line.of, line.ma]))
  const loads = new Map<string, Thing[]>()
  for (const thing of timeline.things) {
    if (thing.kind === 'load') loads.set(thing.circuit, [...(loads.get(thing.circuit) ?? []), thing])
  }
  const shares: Share[] = []
  for (const thing of timeline.things) {
    const ma = figures.get(thing.of) ?? null
    if (ma === null || stateBefore(thing.state, at) !== 'on') continue
    const own = thing.kind === 'load' ? ma : ma - ridingMa(thing, loads.get(thing.circuit) ?? [], figures)
    if (own > 0) shares.push({ of: thing.of, ma: rounded(own) })
  }
  return shares.sort((a, b) => b.ma - a.ma || (a.of < b.of ? -1 : 1))
}

/** Mean of what known loads added to a circuit at its own switchings, mA; with none, what they add now is left out. */
function ridingMa(circuit: Thing, loads: readonly Thing[], figures: ReadonlyMap<string, number | null>): number {
  if (circuit.changes.length === 0) return 0
  let sum = 0
  for (const { at, on } of circuit.changes) {
    for (const load of loads) {
      const ma = figures.get(load.of) ?? 0
      if (ma === null || ma <= 0) continue
      const running = on ? stateBefore(load.state, at + 2) : stateBefore(load.state, at)
      if (running === 'on') sum += ma
    }
  }
  return sum / circuit.changes.length
}
