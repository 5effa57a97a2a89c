import type { BudgetLine } from '../../contract/findings.ts'
import { hoursOff, hoursOn } from '../../timeline/exposure.ts'
import type { Timeline } from '../../timeline/timeline.ts'

/**
 * What each circuit brings to the device it hangs on: what stays of it while none of its loads runs and its loads' lines weighted by the
 * share of the time they run; without the former its own line of the budget, or its loads alone where that is less or missing. A circuit of which neither is known stays without a figure. In the order of the sheet.
 */
export function circuitDemand(timeline: Timeline, lines: readonly BudgetLine[]): BudgetLine[] {
  const byOf = new Map(lines.map((line) => [line.of, line]))
  return timeline.things
    .filter((t) => t.kind === 'circuit')
    .map((circuit) => {
      const own = byOf.get(circuit.of)
      let [ma, high, known] = [0, 0, 0]
      for (const load of timeline.things) {
        const line = byOf.get(load.of)
        if (load.kind !== 'load' || load.circuit !== circuit.ref || line === undefined || line.ma === null) continue
        const on = hoursOn(load.state)
        const hours = on + hoursOff(load.state)
        const share = hours > 0 ? on / hours : 1
        ma += share * Math.max(0, line.ma)
        high += share * Math.max(0, line.high ?? line.ma)
        known++
      }
      const base: BudgetLine = own ?? {
        of: circuit.of,
        ma: null,
        low: null,
        high: null,
        basis: 'unjudged',
        switchings: 0,
      }
      if (base.ma === null)
        return known === 0
          ? { ...base, note: 'No figure.' }
          : { ...base, ma, low: 0, high, note: 'From its loads alone: at least so much.' }
      if (base.baseMa !== undefined) {
        // without its loads it brings this; they come on top while they run
        const still = Math.max(0, base.baseMa)
        const half = (base.high ?? base.ma) - base.ma
        return { ...base, ma: still + ma, low: 0, high: still + half + high }
      }
      return { ...base, ma: Math.max(base.ma, ma), high: Math.max(base.high ?? base.ma, high) }
    })
}
