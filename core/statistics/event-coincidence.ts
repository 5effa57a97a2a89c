import { binomialUpperTail } from './binomial.ts'
import { requireFinite, requireRange } from './checks.ts'

export interface EventCoincidence {
  /** Share of A events with a B event before them; null without A events. */
  readonly precursorRate: number | null
  readonly precursorCoincidences: number
  /** Chance of that for one A event if both came at random. */
  readonly precursorProbability: number | null
  /** Chance of so many or more; null without A events. */
  readonly precursorP: number | null
  /** The same from the side of B: share of B events with an A event after them. */
  readonly triggerRate: number | null
  readonly triggerCoincidences: number
  readonly triggerProbability: number | null
  readonly triggerP: number | null
}

/**
 * Event coincidence analysis: an event a of A is preceded by b of B when 0 <= (a − lag) − b <= window, both ends included. The
 * null takes both as independent Poisson processes, so a rhythm common to both needs another null (circular shifts).
 * All times in one unit; `span` is the length of the time watched.
 *
 * @throws {CoreError} not_finite, out_of_range
 * @see Donges et al. (2016), Eur. Phys. J. Special Topics 225, 471-487
 */
export function eventCoincidence(
  a: ArrayLike<number>,
  b: ArrayLike<number>,
  options: { readonly window: number; readonly lag?: number; readonly span: number },
): EventCoincidence {
  const { window, lag = 0, span } = options
  requireFinite('eventCoincidence', a)
  requireFinite('eventCoincidence', b)
  requireRange('eventCoincidence', window >= 0, 'a window from 0', window)
  requireRange(
    'eventCoincidence',
    lag >= 0 && span > lag && Number.isFinite(span),
    'a span above the lag, lag from 0',
    `${span}, ${lag}`,
  )
  requireRange('eventCoincidence', window <= span - lag, 'a window within the span', window)
  const as = Float64Array.from(a).sort()
  const bs = Float64Array.from(b).sort()
  // For a: b in [a − lag − window, a − lag]. For b: a in [b + lag, b + lag + window].
  const precursors = countWithPartner(as, bs, -lag - window, -lag)
  const triggers = countWithPartner(bs, as, lag, lag + window)
  const share = window / (span - lag)
  const precursor = side(precursors, as.length, bs.length, share)
  const trigger = side(triggers, bs.length, as.length, share)
  return {
    precursorRate: precursor.rate,
    precursorCoincidences: precursors,
    precursorProbability: precursor.probability,
    precursorP: precursor.p,
    triggerRate: trigger.rate,
    triggerCoincidences: triggers,
    triggerProbability: trigger.probability,
    triggerP: trigger.p,
  }
}

/** How many x have a y in [x + from, x + to]; both ascending. Ends that meet but for rounding count as met. */
function countWithPartner(x: Float64Array, y: Float64Array, from: number, to: number): number {
  let count = 0
  let next = 0
  for (const at of x) {
    const slack = 8 * Number.EPSILON * Math.max(Math.abs(at), Math.abs(from), Math.abs(to))
    while (next < y.length && y[next]! < at + from - slack) next++
    if (next < y.length && y[next]! <= at + to + slack) count++
  }
  return count
}

function side(
  coincidences: number,
  events: number,
  partners: number,
  share: number,
): { rate: number | null; probability: number | null; p: number | null } {
  if (events === 0) return { rate: null, probability: null, p: null }
  const none = (1 - share) ** partners
  const p = 1 - none
  return { rate: coincidences / events, probability: p, p: binomialUpperTail(coincidences, events, p, none) }
}
