import { contains, intersect, measureWithin, NO_SPANS, type Spans, totalMs } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import type { ExposureWindow } from '../line-up.ts'
import type { Habit } from './habits.ts'

export const HOUR_MS = 3_600_000
export const MINUTE_MS = 60_000

/** What every window is measured against. */
export interface Frame {
  readonly timeline: Timeline
  /** Energised time, h. */
  readonly hours: number
  /** The trips that count: repeats soon after a reset are one episode. Each as [from, to], ms. */
  readonly trips: readonly { readonly from: number; readonly to: number }[]
  /** How lively the site is over the day: every exposure is measured under each of them. */
  readonly habits: readonly Habit[]
  /** The minute after every known start of anything. */
  readonly kicks: Spans
  /** Time in which the leakage stood in its upper fifth some minutes ago; empty without a log. */
  readonly high: Spans
}

/** One part of an exposure, and how much more likely a trip is in it. */
export interface Layer {
  readonly inside: Spans
  readonly weight: number
  /** Only there, when given; a start that nobody read counts only there as well when `gated`. */
  readonly within?: Spans
  readonly gated?: boolean
  /** Whether it holds the beginning of a run, which a state logger may not have read before a trip cut it short. */
  readonly fromStart?: boolean
}

/** Where a state logger that reads seldom is blind. */
export interface Blind {
  /** By trip: 1 where the thing was off when last read, and may have started since. */
  readonly unread: Uint8Array
  /** The time after each start that such a logger may not see. */
  readonly fresh: Spans
}

/**
 * Share of one trip's possible time inside `spans`, 0 to 1. An instant looks at the moment just before it, for the
 * trip itself ends energised time; an interval counts its energised part only.
 */
export function shareOfTrip(
  spans: Spans,
  energised: Spans,
  trip: { readonly from: number; readonly to: number },
): number {
  if (trip.to - trip.from < 2) return contains(spans, trip.from - 1) ? 1 : 0
  const possible = measureWithin(energised, trip.from, trip.to)
  if (possible <= 0) return contains(spans, trip.from - 1) ? 1 : 0
  return Math.min(1, measureWithin(spans, trip.from, trip.to) / possible)
}

/**
 * A window from the time where it holds and the time where that is known: what lies outside `known` counts as
 * exposed in the same proportion, so that ignorance neither accuses nor clears. Null when the window, or its
 * opposite, has too little known time (three minutes) to say anything.
 */
export function windowOf(
  frame: Frame,
  key: string,
  words: string,
  prior: number,
  inside: Spans,
  known: Spans,
): ExposureWindow | null {
  return layeredWindow(frame, key, words, prior, [{ inside, weight: 1 }], known)
}

/** What many windows of a frame ask of the same sets of time, worked out once. Sets are told apart by identity. */
interface Measures {
  meet(a: Spans, b: Spans): Spans
  /** `shareOfTrip` of every trip. */
  sharesOf(spans: Spans): readonly number[]
  /** `hoursOf` under every habit. */
  hoursOf(spans: Spans): readonly number[]
}

const measured = new WeakMap<Frame, Measures>()

function measuresOf(frame: Frame): Measures {
  const { habits, trips } = frame
  const { energised } = frame.timeline
  const met = new WeakMap<Spans, WeakMap<Spans, Spans>>()
  const meet = (a: Spans, b: Spans): Spans =>
    once(
      once(met, a, () => new WeakMap<Spans, Spans>()),
      b,
      () => intersect(a, b),
    )
  const shares = new WeakMap<Spans, readonly number[]>()
  const hours = new WeakMap<Spans, readonly number[]>()
  return once(measured, frame, () => ({
    meet,
    sharesOf: (spans) => once(shares, spans, () => trips.map((trip) => shareOfTrip(spans, energised, trip))),
    hoursOf: (spans) => once(hours, spans, () => habits.map((habit) => habit.hoursOf(spans))),
  }))
}

function once<K extends object, V>(kept: WeakMap<K, V>, key: K, make: () => V): V {
  const before = kept.get(key)
  if (before !== undefined) return before
  const made = make()
  kept.set(key, made)
  return made
}

/**
 * A window whose exposure is no plain yes or no: the sum of its layers, each a set of time with a weight, the first of
 * them the whole of it and what is spoken of. A cause acts in proportion to that sum. As `windowOf` otherwise.
 */
export function layeredWindow(
  frame: Frame,
  key: string,
  words: string,
  prior: number,
  layers: readonly Layer[],
  known: Spans,
  blind: Blind | null = null,
): ExposureWindow | null {
  const { habits, hours, trips } = frame
  const { energised } = frame.timeline
  const { meet, sharesOf, hoursOf } = measuresOf(frame)
  const knownHere = meet(known, energised)
  const knownMs = totalMs(knownHere)
  const held = layers.map(({ inside, within }) => {
    const here = meet(inside, knownHere)
    return within === undefined ? here : meet(here, within)
  })
  const heldMs = totalMs(held[0] ?? NO_SPANS)
  if (heldMs < 3 * MINUTE_MS || knownMs - heldMs < 3 * MINUTE_MS) return null
  const shares = held.map(sharesOf)
  const unknown = sharesOf(knownHere).map((share) => 1 - share)
  const fresh = blind === null ? NO_SPANS : meet(blind.fresh, knownHere)
  // what is known of a trip is the same under every habit
  const isOpen = unknown.map((u, i) => u !== 0 || blind?.unread[i] === 1)
  const isKnown = !isOpen.includes(true)
  const hoursBy: number[] = []
  const weightsBy: Float64Array[] = []
  let insideHours = 0
  let inside = new Float64Array(0)
  habits.forEach((_, k) => {
    const all = hoursOf(knownHere)[k]!
    const fractions = held.map((spans) => hoursOf(spans)[k]! / all)
    const started = hoursOf(fresh)[k]! / all
    const shareIn = (l: number, i: number): number => {
      const { fromStart, gated, within = NO_SPANS } = layers[l]!
      const isUnread = fromStart === true && blind?.unread[i] === 1
      const unread = isUnread && (gated !== true || contains(within, trips[i]!.from - 1)) ? started : 0
      return Math.min(1, shares[l]![i]! + unread + unknown[i]! * fractions[l]!)
    }
    hoursBy.push(hours * layers.reduce((sum, { weight }, l) => sum + weight * fractions[l]!, 0))
    if (k === 0) {
      insideHours = hours * fractions[0]!
      inside = Float64Array.from(trips, (_, i) => shareIn(0, i))
    }
    const [before] = weightsBy
    if (before !== undefined && isKnown) {
      weightsBy.push(before)
      return
    }
    const weights = before === undefined ? new Float64Array(trips.length) : before.slice()
    for (let i = 0; i < weights.length; i++) {
      if (before !== undefined && !isOpen[i]) continue
      let sum = 0
      for (let l = 0; l < layers.length; l++) sum += layers[l]!.weight * shareIn(l, i)
      weights[i] = sum
    }
    weightsBy.push(weights)
  })
  // whoever counts windows by their sets counts this one by itself
  const when = { inside: held[0] ?? NO_SPANS, known: knownHere }
  return { key, words, prior, hoursBy, weightsBy, inside, insideHours, when }
}

/** Scales the priors of the windows that exist so that they sum to one. */
export function normalised(windows: readonly (ExposureWindow | null)[]): ExposureWindow[] {
  const kept = windows.filter((w): w is ExposureWindow => w !== null)
  let sum = 0
  for (const w of kept) sum += w.prior
  return kept.map((w) => ({ ...w, prior: w.prior / sum }))
}

/**
 * The same windows with each trip's weight multiplied by what the leakage before it says, and their priors by `prior`.
 */
export function marked(windows: readonly ExposureWindow[], marks: Float64Array, prior: number): ExposureWindow[] {
  return windows.map((w) => {
    const [first] = w.weightsBy
    const product = (weights: Float64Array): Float64Array => weights.map((share, i) => share * marks[i]!)
    const same = w.weightsBy.every((weights) => weights === first)
    const once = same && first !== undefined ? product(first) : null
    return { ...w, prior: w.prior * prior, weightsBy: w.weightsBy.map((weights) => once ?? product(weights)) }
  })
}
