import { contains, intersect, measureWithin, type Spans, totalMs } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import type { ExposureWindow } from '../line-up.ts'

export const HOUR_MS = 3_600_000
export const MINUTE_MS = 60_000

/** What every window is measured against. */
export interface Frame {
  readonly timeline: Timeline
  /** Energised time, h. */
  readonly hours: number
  /** The trips that count: repeats soon after a reset are one episode. Each as [from, to], ms. */
  readonly trips: readonly { readonly from: number; readonly to: number }[]
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
  const { energised } = frame.timeline
  const held = intersect(inside, energised)
  const knownHere = intersect(known, energised)
  const heldMs = totalMs(held)
  const knownMs = totalMs(knownHere)
  if (heldMs < 3 * MINUTE_MS || knownMs - heldMs < 3 * MINUTE_MS) return null
  const fraction = heldMs / knownMs
  const shares = new Float64Array(frame.trips.length)
  frame.trips.forEach((trip, i) => {
    const share = shareOfTrip(held, energised, trip)
    const unknown = 1 - shareOfTrip(knownHere, energised, trip)
    shares[i] = Math.min(1, share + unknown * fraction)
  })
  return { key, words, prior, hours: frame.hours * fraction, inside: shares, weights: shares }
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
  return windows.map((w) => ({ ...w, prior: w.prior * prior, weights: w.inside.map((share, i) => share * marks[i]!) }))
}
