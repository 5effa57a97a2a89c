import type { LocalClock } from '../../timeline/local-clock.ts'
import { lowerBound } from '../../timeline/series.ts'
import type { Spans } from '../../timeline/spans.ts'

/** Every offset of a zone since 1972 is a multiple of this, so that a piece of it lies within one local hour. */
const CELL_MS = 900_000
const FOUR_WEEKS = 28

/** Ways of comparing like with like: the same local hour of all days, or of the same weekday within four weeks. */
export type Strata = 'hour' | 'weekday-hour'

/** Known time by stratum, and how much of it is exposed; ms. */
export interface StratumTimes {
  readonly known: Float64Array
  readonly exposed: Float64Array
}

/** Where one trip may have been. */
export interface TripPlace {
  readonly stratum: number
  /** Share of the trip's possible time in this stratum; those of a trip sum to 1. */
  readonly share: number
  /** Exposed part of that share, 0 to 1. */
  readonly inside: number
}

/** The strata of a span of time on the site's clock. */
export interface Stratifier {
  readonly strata: Strata
  times(inside: Spans, known: Spans): StratumTimes
  /**
   * The strata in which each trip may lie: one for an instant, several for an interval, in proportion to its known time. An instant
   * looks at the moment just before, for the trip itself ends energised time. Null where nothing of a trip's time is known.
   */
  places(inside: Spans, known: Spans, trips: readonly Interval[]): (readonly TripPlace[] | null)[]
}

interface Interval {
  readonly from: number
  readonly to: number
}

/**
 * Cuts [from, to) into strata. Four-week blocks begin at `from`, so that a story may be moved by whole weeks. Linear in the quarter
 * hours of the span; each use is linear in those that its spans touch.
 *
 * @see Maclure (1991), Am. J. Epidemiol. 133, 144-153; Janes, Sheppard & Lumley (2005), Epidemiology 16, 717-726
 */
export function stratifier(clock: LocalClock, from: number, to: number, strata: Strata): Stratifier {
  const origin = Math.floor(from / CELL_MS)
  const first = clock.dayNumber(from)
  const cells = Int32Array.from({ length: Math.ceil(to / CELL_MS) - origin + 1 }, (_, i) => {
    const t = (origin + i) * CELL_MS
    const hour = Math.floor(clock.minuteOfDay(t) / 60)
    if (strata === 'hour') return hour
    const day = Math.max(0, clock.dayNumber(t) - first)
    return (Math.floor(day / FOUR_WEEKS) * 7 + (day % 7)) * 24 + hour
  })
  const count = cells.reduce((most, stratum) => Math.max(most, stratum), 0) + 1
  const visit = (spans: Spans, a: number, b: number, add: (stratum: number, ms: number) => void): void => {
    // an odd position lies within an interval
    for (let i = lowerBound(spans, a + 1) & ~1; i < spans.length && spans[i]! < b; i += 2) {
      const end = Math.min(spans[i + 1]!, b)
      for (let at = Math.max(spans[i]!, a); at < end; ) {
        const cell = Math.floor(at / CELL_MS)
        const next = Math.min(end, (cell + 1) * CELL_MS)
        add(cells[cell - origin]!, next - at)
        at = next
      }
    }
  }
  const sums = (spans: Spans): Float64Array => {
    const ms = new Float64Array(count)
    visit(spans, from, to, (stratum, length) => {
      ms[stratum]! += length
    })
    return ms
  }
  // most suspects are known at the same time: all of it
  let last: { readonly spans: Spans; readonly ms: Float64Array } | null = null
  return {
    strata,
    times: (inside, known) => {
      if (last === null || !isSame(last.spans, known)) last = { spans: known, ms: sums(known) }
      return { known: last.ms, exposed: sums(inside) }
    },
    places: (inside, known, trips) =>
      trips.map((trip) => {
        const start = Math.max(from, trip.to - trip.from < 2 ? trip.from - 1 : trip.from)
        const end = Math.max(trip.to, start + 1)
        const here = new Map<number, { all: number; exposed: number }>()
        let total = 0
        visit(known, start, end, (stratum, ms) => {
          const held = here.get(stratum) ?? { all: 0, exposed: 0 }
          held.all += ms
          total += ms
          here.set(stratum, held)
        })
        if (total <= 0) return null
        visit(inside, start, end, (stratum, ms) => {
          const held = here.get(stratum)
          if (held !== undefined) held.exposed += ms
        })
        return [...here].map(([stratum, { all, exposed }]) => ({
          stratum,
          share: all / total,
          inside: Math.min(1, exposed / all),
        }))
      }),
  }
}

function isSame(a: Spans, b: Spans): boolean {
  return a.length === b.length && a.every((edge, i) => edge === b[i])
}
