import { eventCoincidence } from '../../statistics/event-coincidence.ts'
import { holm } from '../../statistics/holm.ts'
import type { Series } from '../../timeline/series.ts'
import { totalMs } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { energisedClock } from '../energised-clock.ts'
import { rounded } from '../words.ts'

const HOUR_MS = 3_600_000
const LEAST_ONSETS = 3

/** When spells begin: readings for which `isIn` holds after so many hours in which it held for none. */
export function onsets(series: Series, isIn: (v: number) => boolean, quietHours: number): number[] {
  const found: number[] = []
  let last = Number.NEGATIVE_INFINITY
  for (let i = 0; i < series.t.length; i++) {
    if (!isIn(series.v[i]!)) continue
    if (series.t[i]! - last > quietHours * HOUR_MS) found.push(series.t[i]!)
    last = series.t[i]!
  }
  return found
}

/** How trips come after the beginning of spells. */
export interface Coincidence {
  /** Adjusted for the windows and lags tried (Holm 1979). */
  readonly p: number
  readonly figures: Readonly<Record<string, number>>
}

/**
 * Event coincidence rates of trips with spells that began before them, over several windows and lags (hours), on the clock of energised
 * time, against the binomial null. Null below three spells.
 *
 * @see Donges et al. (2016), Eur. Phys. J. Special Topics 225, 471-487
 */
export function coincidence(
  timeline: Timeline,
  trips: readonly number[],
  began: readonly number[],
  windows: readonly { readonly window: number; readonly lag: number }[],
): Coincidence | null {
  if (began.length < LEAST_ONSETS || trips.length === 0) return null
  const hours = energisedClock(timeline)
  const span = totalMs(timeline.energised) / HOUR_MS
  const [a, b] = [trips.map(hours), began.map(hours)]
  const tried = windows.flatMap(({ window, lag }) =>
    lag + window < span / 2 ? [{ window, lag, found: eventCoincidence(a, b, { window, lag, span }) }] : [],
  )
  if (tried.length === 0) return null
  const adjusted = holm(tried.map(({ found }) => found.precursorP ?? 1))
  let best = 0
  adjusted.forEach((p, i) => {
    if (p < adjusted[best]!) best = i
  })
  const { window, lag, found } = tried[best]!
  return {
    p: adjusted[best]!,
    figures: {
      coincidenceP: rounded(adjusted[best]!),
      coincidenceRate: rounded(found.precursorRate ?? 0),
      coincidenceExpected: rounded(found.precursorProbability ?? 0),
      coincidenceWindowHours: window,
      coincidenceLagHours: lag,
      spells: began.length,
    },
  }
}

export const COINCIDENCE_METHOD = 'event coincidence rates with a binomial null (Donges et al. 2016)'
