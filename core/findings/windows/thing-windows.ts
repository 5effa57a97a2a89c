import { afterEdges, knownOf } from '../../timeline/exposure.ts'
import { intersect, type Spans, subtract } from '../../timeline/spans.ts'
import type { Thing } from '../../timeline/timeline.ts'
import type { ExposureWindow } from '../line-up.ts'
import { type Frame, MINUTE_MS, normalised, windowOf } from './trip-share.ts'

/** Minutes after switching that are tried, with their share of the suspect's prior. */
const AFTER_ON = [
  [1, 0.08],
  [3, 0.12],
  [10, 0.15],
  [30, 0.1],
] as const
const AFTER_OFF = [[10, 0.04]] as const
const LATE = [
  [10, 0.06],
  [60, 0.04],
] as const
const WHILE_ON = 0.41

/**
 * The ways in which a circuit or load may fire trips: while it is on, within minutes of its start or its end, or
 * only once it has run for a while (domain.md, mechanisms). Empty when its state never changed while it was known.
 */
export function thingWindows(frame: Frame, thing: Thing): ExposureWindow[] {
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
  const name = thing.kind === 'circuit' ? 'switched on' : 'its start'
  const plural = (minutes: number): string => (minutes === 1 ? 'a minute' : `${minutes} minutes`)
  const windows: (ExposureWindow | null)[] = [
    windowOf(frame, 'on', thing.kind === 'circuit' ? 'while it was on' : 'while it ran', WHILE_ON, on, known),
  ]
  if (thing.changes.some((c) => c.on)) {
    for (const [minutes, prior] of AFTER_ON) {
      const inside = intersect(after(true, minutes), on)
      const words =
        thing.kind === 'circuit' ? `within ${plural(minutes)} of being ${name}` : `within ${plural(minutes)} of ${name}`
      windows.push(windowOf(frame, `after-on-${minutes}`, words, prior, inside, known))
    }
    for (const [minutes, prior] of LATE) {
      const inside = subtract(on, after(true, minutes))
      windows.push(
        windowOf(frame, `late-${minutes}`, `when it had run for more than ${plural(minutes)}`, prior, inside, known),
      )
    }
  }
  for (const [minutes, prior] of AFTER_OFF) {
    const inside = intersect(after(false, minutes), off)
    windows.push(windowOf(frame, `after-off-${minutes}`, `within ${plural(minutes)} of its end`, prior, inside, known))
  }
  return normalised(windows)
}
