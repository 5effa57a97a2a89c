import { mad } from '../../statistics/mad.ts'
import { median } from '../../statistics/median.ts'
import { type Spans, subtract } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { readingsWithin } from '../levels.ts'

/** A rise of a circuit's own leakage that tells: so many mA, and so many times its usual wander. */
const LEAST_MA = 0.3
const WIDTHS = 3
const LEAST_READINGS = 10
const MOST_READINGS = 2_000

/**
 * Which circuit carries a suspect of no known place (rain, a timer, something that follows the sun), by its own leakage channel:
 * the one whose level rises most while the suspect's window holds. Reference of the circuit by suspect; absent without such a rise.
 */
export function carriers(
  timeline: Timeline,
  windows: ReadonlyMap<string, { readonly inside: Spans; readonly known: Spans }>,
): Map<string, string> {
  const found = new Map<string, string>()
  const circuits = timeline.things.filter((t) => t.kind === 'circuit' && t.leakage !== null)
  if (circuits.length === 0) return found
  for (const [of, { inside, known }] of windows) {
    if (timeline.things.some((t) => t.of === of)) continue
    const outside = subtract(known, inside)
    let most = 0
    for (const circuit of circuits) {
      const levels = (within: Spans): Float64Array =>
        readingsWithin(circuit.leakage!, within, timeline.from, timeline.to, MOST_READINGS).v
      const [during, apart] = [levels(inside), levels(outside)]
      if (during.length < LEAST_READINGS || apart.length < LEAST_READINGS) continue
      const rise = median(during) - median(apart)
      if (rise > Math.max(LEAST_MA, WIDTHS * mad(apart)) && rise > most) {
        most = rise
        found.set(of, circuit.ref)
      }
    }
  }
  return found
}
