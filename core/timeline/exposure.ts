import {
  clip,
  complement,
  contains,
  intersect,
  NO_SPANS,
  type Spans,
  spansOf,
  subtract,
  totalMs,
  union,
  widen,
} from './spans.ts'

/**
 * A step function with three values over time: where it holds, where it does not, and (all the rest) where nobody
 * knows. `on` and `off` are disjoint; unknown is never off.
 */
export interface Exposure {
  readonly on: Spans
  readonly off: Spans
}

export type State = 'on' | 'off' | 'unknown'

/** One change of state. */
export interface Edge {
  readonly at: number
  readonly on: boolean
}

/** Nothing is known at any time. */
export const UNKNOWN: Exposure = { on: NO_SPANS, off: NO_SPANS }

/** Holds within `on` and, as far as [from, to) goes, nowhere else: for what is known throughout. */
export function exposureOfSpans(on: Spans, from: number, to: number): Exposure {
  return { on: clip(on, from, to), off: complement(on, from, to) }
}

/** Time in which the state is known. */
export function knownOf(exposure: Exposure): Spans {
  return union(exposure.on, exposure.off)
}

/** Both hold. Off as soon as one is off, even where the other is unknown (Kleene's strong logic, 1938). */
export function both(a: Exposure, b: Exposure): Exposure {
  return { on: intersect(a.on, b.on), off: union(a.off, b.off) }
}

/** At least one holds. On as soon as one is on, even where the other is unknown. */
export function either(a: Exposure, b: Exposure): Exposure {
  return { on: union(a.on, b.on), off: intersect(a.off, b.off) }
}

/** Holds where the other does not; unknown stays unknown. */
export function not(a: Exposure): Exposure {
  return { on: a.off, off: a.on }
}

/** What `first` knows, and where it knows nothing, what `second` knows. */
export function fillUnknown(first: Exposure, second: Exposure): Exposure {
  return {
    on: union(first.on, subtract(second.on, first.off)),
    off: union(first.off, subtract(second.off, first.on)),
  }
}

/** The exposure within the given time (mostly: energised); unknown outside. */
export function clipExposure(exposure: Exposure, within: Spans): Exposure {
  return { on: intersect(exposure.on, within), off: intersect(exposure.off, within) }
}

/** Hours in which it holds. */
export function hoursOn(exposure: Exposure): number {
  return totalMs(exposure.on) / 3_600_000
}

/** Hours in which it is known not to hold. */
export function hoursOff(exposure: Exposure): number {
  return totalMs(exposure.off) / 3_600_000
}

/** State from this instant on. O(log n). */
export function stateAt(exposure: Exposure, t: number): State {
  if (contains(exposure.on, t)) return 'on'
  return contains(exposure.off, t) ? 'off' : 'unknown'
}

/**
 * State up to this instant. A trip ends the energised time it happens in, so it is this one that tells what was on at
 * a trip. O(log n).
 */
export function stateBefore(exposure: Exposure, t: number): State {
  if (containsBefore(exposure.on, t)) return 'on'
  return containsBefore(exposure.off, t) ? 'off' : 'unknown'
}

/** The instants at which on and off meet, in order. A change that lies somewhere in unknown time is none. */
export function edgesOf(exposure: Exposure): Edge[] {
  const { on, off } = exposure
  const edges: Edge[] = []
  let j = 0
  for (let i = 0; i < on.length; i += 2) {
    const from = on[i]!
    const to = on[i + 1]!
    while (j < off.length && off[j + 1]! < from) j += 2
    if (j < off.length && off[j + 1] === from) edges.push({ at: from, on: true })
    while (j < off.length && off[j]! < to) j += 2
    if (j < off.length && off[j] === to) edges.push({ at: to, on: false })
  }
  return edges
}

/**
 * Within `window` ms after any of the changes: on in [at, at + window), off elsewhere in [from, to).
 * With `known` (time in which a change would have been seen) it is unknown wherever an unseen change may lie less than
 * the window back, also at the beginning of `known`. Choose the changes first: switching on, off, or both.
 */
export function afterEdges(
  changes: Iterable<{ readonly at: number }>,
  from: number,
  to: number,
  window: number,
  known?: Spans,
): Exposure {
  const pairs: [number, number][] = []
  for (const { at } of changes) pairs.push([at, at + window])
  const on = clip(spansOf(pairs), from, to)
  const rest = complement(on, from, to)
  if (known === undefined) return { on, off: rest }
  return { on, off: subtract(rest, widen(complement(known, from - window, to), 0, window)) }
}

/** Whether the set reaches up to t from before. */
function containsBefore(spans: Spans, t: number): boolean {
  let low = 0
  let high = spans.length >>> 1
  while (low < high) {
    const middle = (low + high) >>> 1
    if (spans[2 * middle + 1]! < t) low = middle + 1
    else high = middle
  }
  return 2 * low < spans.length && spans[2 * low]! < t
}
