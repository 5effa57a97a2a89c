import type { Pattern } from '../../contract/findings.ts'
import { seededRandom } from '../../statistics/random.ts'
import { type Spans, totalMs } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { isDaily } from '../windows/clock-windows.ts'
import { figure, rounded } from '../words.ts'
import { strongest, strongestBound } from './rayleigh-search.ts'

const HOUR_MS = 3_600_000
const SHORTEST_HOURS = 1
const LONGEST_HOURS = 240
/** A period must be seen this often to be one. */
const LEAST_TURNS = 3
const OVERSAMPLE = 3
const MOST_FREQUENCIES = 30_000
/** Above so many turns of angles the throws are left out, and the bound stands alone. */
const FEW_TURNS = 250_000
const MOST_SIMULATIONS = 399
/** Turns of angles that the simulation may cost. */
const COST = 8_000_000
const SPOKEN = 0.05
/** Above this p a period is spoken of with doubt. */
const SURE = 0.005

/**
 * Whether trips keep a period from an hour to ten days: Rayleigh's power at every period, the largest compared with
 * that of as many trips thrown at random over energised time, which pays for all periods tried and for the time without
 * supply; where there are too many of both to throw, and where chance is beyond the throws, by a bound (`strongestBound`).
 */
export function periodPattern(timeline: Timeline, trips: readonly number[]): Pattern {
  const spanHours = (timeline.to - timeline.from) / HOUR_MS
  const longest = Math.min(LONGEST_HOURS, spanHours / LEAST_TURNS)
  if (longest <= SHORTEST_HOURS) return { verdict: 'The span is too short to tell a period.', p: null }
  const step = 1 / (OVERSAMPLE * spanHours)
  const count = Math.min(MOST_FREQUENCIES, Math.floor((1 / SHORTEST_HOURS - 1 / longest) / step) + 1)
  const frequencies = Float64Array.from({ length: count }, (_, k) => 1 / longest + k * step)
  const hours = trips.map((t) => (t - timeline.from) / HOUR_MS)
  const seen = strongest(hours, frequencies)
  const bound = strongestBound(seen, hours.length, frequencies, timeline.energised, timeline.from)
  const thrown = count * hours.length > FEW_TURNS ? null : byThrows(timeline, hours, frequencies, seen.power)
  const p = Math.min(bound, thrown?.p ?? 1)
  const against = thrown === null ? '' : ` and ${thrown.throws} random throws over energised time`
  const method = `Rayleigh periodogram (Mardia & Jupp 2000), ${count} periods, against the resultant of energised time${against}`
  const figures = { p: rounded(p), method, trips: trips.length }
  const period = 1 / frequencies[seen.at]!
  if (p >= SPOKEN) {
    return {
      verdict: `No period between ${figure(1 / frequencies[count - 1]!)} and ${figure(longest)} hours stands out.`,
      ...figures,
    }
  }
  const whole = isDaily(period, spanHours) ? ': the same time of day' : ''
  const keep = p <= SURE ? 'Trips keep' : 'Trips may keep'
  const doubt = p <= SURE ? '' : `; one in ${Math.round(1 / p)} logs without a period looks so`
  return { verdict: `${keep} a period of ${figure(period)} hours${whole}${doubt}.`, ...figures, hours: rounded(period) }
}

/** Share of as many trips thrown at random over energised time, seeded by the trips, whose strongest period is as strong. */
function byThrows(
  { energised, from }: Timeline,
  hours: readonly number[],
  frequencies: Float64Array,
  power: number,
): { readonly p: number; readonly throws: number } {
  const throws = Math.max(99, Math.min(MOST_SIMULATIONS, Math.floor(COST / (frequencies.length * hours.length))))
  const random = seededRandom(`period ${hours.map((h) => h.toFixed(3)).join(' ')}`)
  let asStrong = 1
  for (let s = 0; s < throws; s++) {
    const thrown = hours.map(() => placeIn(energised, random.uniform(), from))
    if (strongest(thrown, frequencies).power >= power) asStrong++
  }
  return { p: asStrong / (throws + 1), throws }
}

/** The hour since `from` below which a share of the energised time lies. */
function placeIn(energised: Spans, share: number, from: number): number {
  let left = share * totalMs(energised)
  for (let i = 0; i < energised.length; i += 2) {
    const length = energised[i + 1]! - energised[i]!
    if (left < length) return (energised[i]! + left - from) / HOUR_MS
    left -= length
  }
  return 0
}
