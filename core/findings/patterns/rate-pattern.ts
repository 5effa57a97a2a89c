import type { Pattern } from '../../contract/findings.ts'
import { holm, poissonRateRatio } from '../../statistics/index.ts'
import { contains, intersect, type Spans, totalMs } from '../../timeline/spans.ts'
import { countOf, rounded } from '../words.ts'

const HOUR_MS = 3_600_000
/** Below this adjusted p a preference is spoken of as one. */
const SPOKEN = 0.05

/** A set of time that trips may prefer. */
export interface Preferred {
  readonly words: string
  readonly inside: Spans
  /** Time in which being inside or not is known. */
  readonly known: Spans
}

/**
 * Whether trips come at a higher rate inside a set of time than outside it: exact comparison of two Poisson rates over
 * known energised time, the best of several sets by its p-value after Holm's adjustment. Sets without an hour on either side are
 * passed over; with none left the verdict is `otherwise`. `noun` is what is counted.
 *
 * @see Przyborowski & Wilenski (1940), Biometrika 31, 313-323; Holm (1979), Scand. J. Statist. 6, 65-70
 */
export function ratePattern(
  energised: Spans,
  trips: readonly number[],
  sets: readonly Preferred[],
  otherwise: string,
  noun = 'trip',
): Pattern {
  const tried = sets.flatMap((set) => {
    const known = intersect(set.known, energised)
    const inside = intersect(set.inside, known)
    const hours = [totalMs(inside) / HOUR_MS, (totalMs(known) - totalMs(inside)) / HOUR_MS] as const
    if (hours[0] < 1 || hours[1] < 1) return []
    // A trip ends its energised time, so the moment before it tells where it fell.
    const seen = trips.filter((t) => contains(known, t - 1))
    const within = seen.filter((t) => contains(inside, t - 1)).length
    const test = poissonRateRatio([within, seen.length - within], hours)
    return [{ words: set.words, hours, within, seen: seen.length, test }]
  })
  const adjusted = holm(tried.map((one) => one.test.pTwoSidedDoubled))
  let best = -1
  tried.forEach((one, i) => {
    if (one.seen > 0 && (best < 0 || one.test.pTwoSidedDoubled < tried[best]!.test.pTwoSidedDoubled)) best = i
  })
  if (best < 0) return { verdict: otherwise, p: null }
  const { words, hours, within, seen, test } = tried[best]!
  const expected = (seen * hours[0]) / (hours[0] + hours[1])
  const p = adjusted[best]!
  const count = `${countOf(within, noun)} of ${seen} fell ${words}; ${Number(expected.toPrecision(2))} would by chance`
  const lead = p < SPOKEN ? (within > expected ? 'More' : 'Fewer') : null
  return {
    verdict: lead === null ? `No clear preference: ${count}.` : `${lead} trips than chance: ${count}.`,
    p: rounded(p),
    words,
    method: 'exact comparison of two Poisson rates (Przyborowski & Wilenski 1940), adjusted by Holm (1979)',
    trips: seen,
    within,
    expected: rounded(expected),
    hoursInside: rounded(hours[0]),
    rateRatio: test.ratio === null || !Number.isFinite(test.ratio) ? null : rounded(test.ratio),
    tried: tried.length,
  }
}
