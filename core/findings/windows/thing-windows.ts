import { afterEdges, knownOf } from '../../timeline/exposure.ts'
import { intersect, type Spans, subtract } from '../../timeline/spans.ts'
import type { ExposureWindow } from '../line-up.ts'
import type { HeldThing } from './held-to-trips.ts'
import { type Frame, type Layer, layeredWindow, MINUTE_MS, normalised } from './trip-share.ts'

/** Minutes after switching on that are tried alone, with their share of the suspect's prior. */
const AFTER_ON = [
  [1, 0.18],
  [3, 0.08],
  [10, 0.08],
  [30, 0.03],
] as const
/** The same as the likelier part of a whole run, and how many times likelier: a fault may fire at once or later in the run. */
const MOSTLY_AFTER_ON = [1, 3, 10] as const
const TIMES = [8, 50] as const
const MOSTLY = 0.04
const KICKED = 0.05
const HIGH = 0.03
/** Its start while another thing takes up headroom: so many times likelier; the prior is shared by the others. */
const WITH_TIMES = 50
const WITH = 0.1
const AFTER_OFF = [[10, 0.04]] as const
const LATE = [
  [10, 0.05],
  [60, 0.03],
] as const
const WHILE_ON = 0.24

/** Another thing that takes up headroom while it runs. */
export interface Partner {
  readonly of: string
  readonly label: string
  readonly on: Spans
}

/**
 * The ways in which a circuit or load may fire trips: while it is on, within minutes of its start or its end, mostly
 * then, or only once it has run for a while (domain.md, mechanisms); also its start while one of the `partners` takes up headroom. Empty when its state never changed while it was
 * known.
 */
export function thingWindows(
  frame: Frame,
  { thing, blind }: HeldThing,
  partners: readonly Partner[] = [],
): ExposureWindow[] {
  const { on, off } = thing.state
  const known = knownOf(thing.state)
  const { from, to } = frame.timeline
  const after = (isOn: boolean, minutes: number): Spans =>
    afterEdges(
      thing.changes.filter((c) => c.on === isOn),
      from,
      to,
      minutes * MINUTE_MS,
    ).on
  const isCircuit = thing.kind === 'circuit'
  const plural = (minutes: number): string => (minutes === 1 ? 'a minute' : `${minutes} minutes`)
  const ofStart = (minutes: number): string =>
    `within ${plural(minutes)} of ${isCircuit ? 'being switched on' : 'its start'}`
  const whileOn = isCircuit ? 'while it was on' : 'while it ran'
  const run: Layer = { inside: on, weight: 1, fromStart: true }
  const windows: (ExposureWindow | null)[] = [layeredWindow(frame, 'on', whileOn, WHILE_ON, [run], known, blind)]
  if (thing.changes.some((c) => c.on)) {
    const started = new Map(AFTER_ON.map(([minutes]) => [minutes as number, intersect(after(true, minutes), on)]))
    for (const [minutes, prior] of AFTER_ON) {
      const layer: Layer = { inside: started.get(minutes)!, weight: 1, fromStart: true }
      windows.push(layeredWindow(frame, `after-on-${minutes}`, ofStart(minutes), prior, [layer], known, blind))
    }
    for (const minutes of MOSTLY_AFTER_ON) {
      for (const times of TIMES) {
        const first: Layer = { inside: started.get(minutes)!, weight: times - 1, fromStart: true }
        const words = `${whileOn}, the likelier the sooner after ${isCircuit ? 'being switched on' : 'its start'}`
        windows.push(layeredWindow(frame, `on-${times}x${minutes}`, words, MOSTLY, [run, first], known, blind))
      }
    }
    // the last step of another thing while this one has used the headroom up
    for (const times of TIMES) {
      const kick: Layer = { inside: on, within: frame.kicks, weight: times - 1, fromStart: true }
      const words = `${whileOn}, mostly as something came on`
      windows.push(layeredWindow(frame, `on-kick-${times}`, words, KICKED, [run, kick], known, blind))
    }
    // what others leak at the time brings it the nearer to the trip current
    if (frame.high.length > 0) {
      for (const times of TIMES) {
        const high: Layer = { inside: on, within: frame.high, weight: times - 1, fromStart: true, gated: true }
        const early: Layer = { ...high, inside: started.get(3)! }
        const words = `${whileOn}, mostly while the rest leaked much`
        windows.push(layeredWindow(frame, `on-high-${times}`, words, HIGH, [run, high], known, blind))
        windows.push(layeredWindow(frame, `on-high-early-${times}`, words, HIGH, [run, early], known, blind))
      }
    }
    for (const partner of partners) {
      const early = (minutes: number): Layer => ({
        inside: started.get(minutes)!,
        within: partner.on,
        weight: WITH_TIMES,
        fromStart: true,
        gated: true,
      })
      const words = `as it started while ${partner.label} ran`
      const prior = WITH / (3 * partners.length)
      const key = `with-${partner.of}`
      windows.push(
        layeredWindow(frame, key, words, prior, [early(1)], known, blind),
        layeredWindow(frame, `${key}-1`, `${whileOn}, mostly ${words}`, prior, [run, early(1)], known, blind),
        layeredWindow(frame, `${key}-3`, `${whileOn}, mostly ${words}`, prior, [run, early(3)], known, blind),
      )
    }
    for (const [minutes, prior] of LATE) {
      const inside = subtract(on, after(true, minutes))
      const words = `when it had run for more than ${plural(minutes)}`
      windows.push(layeredWindow(frame, `late-${minutes}`, words, prior, [{ inside, weight: 1 }], known))
    }
  }
  for (const [minutes, prior] of AFTER_OFF) {
    const inside = intersect(after(false, minutes), off)
    const words = `within ${plural(minutes)} of its end`
    windows.push(layeredWindow(frame, `after-off-${minutes}`, words, prior, [{ inside, weight: 1 }], known))
  }
  return normalised(windows)
}
