import type { Pattern } from '../../contract/findings.ts'
import { seededRandom } from '../../statistics/random.ts'
import { type Spans, totalMs } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { isDaily } from '../windows/clock-windows.ts'
import { figure, rounded } from '../words.ts'

const HOUR_MS = 3_600_000
const SHORTEST_HOURS = 1
const LONGEST_HOURS = 240
/** A period must be seen this often to be one. */
const LEAST_TURNS = 3
const OVERSAMPLE = 3
const MOST_FREQUENCIES = 1_200
const MOST_SIMULATIONS = 399
/** Turns of angles that the simulation may cost. */
const COST = 8_000_000
const SPOKEN = 0.05
/** Above this p a period is spoken of with doubt. */
const SURE = 0.005
/** Share of the largest power that counts as as large. */
const ALIKE = 0.8

/**
 * Whether trips keep a period from an hour to ten days: Rayleigh's power at every period, the largest compared with
 * that of as many trips thrown at random over energised time (seeded by the trips), which pays for all periods tried and for the time without
 * supply. The shortest periods are given up before the longest when a span has too many to try.
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
  const simulations = Math.max(99, Math.min(MOST_SIMULATIONS, Math.floor(COST / (count * hours.length))))
  const random = seededRandom(`period ${hours.map((h) => h.toFixed(3)).join(' ')}`)
  let asStrong = 1
  for (let s = 0; s < simulations; s++) {
    const thrown = hours.map(() => placeIn(timeline.energised, random.uniform(), timeline.from))
    if (strongest(thrown, frequencies).power >= seen.power) asStrong++
  }
  const p = asStrong / (simulations + 1)
  const method = `Rayleigh periodogram, ${count} periods, against ${simulations} random throws over energised time`
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

/** Largest Rayleigh power over evenly spaced frequencies; each angle is turned on from the one before. */
function strongest(hours: readonly number[], frequencies: Float64Array): { power: number; at: number } {
  const count = frequencies.length
  const c = new Float64Array(count)
  const s = new Float64Array(count)
  const step = count < 2 ? 0 : frequencies[1]! - frequencies[0]!
  for (const h of hours) {
    let x = Math.cos(2 * Math.PI * frequencies[0]! * h)
    let y = Math.sin(2 * Math.PI * frequencies[0]! * h)
    const turnX = Math.cos(2 * Math.PI * step * h)
    const turnY = Math.sin(2 * Math.PI * step * h)
    for (let k = 0; k < count; k++) {
      c[k]! += x
      s[k]! += y
      const next = x * turnX - y * turnY
      y = x * turnY + y * turnX
      x = next
    }
  }
  let power = 0
  for (let k = 0; k < count; k++) power = Math.max(power, (c[k]! ** 2 + s[k]! ** 2) / hours.length)
  // whole fractions of a period fit about as well as it does: the longest is the plain one
  let at = 0
  while (at + 1 < count && c[at]! ** 2 + s[at]! ** 2 < ALIKE * power * hours.length) at++
  return { power, at: peakNear(c, s, at) }
}

/** The top of the peak that begins to rise at `from`. */
function peakNear(c: Float64Array, s: Float64Array, from: number): number {
  let at = from
  while (at + 1 < c.length && Math.hypot(c[at + 1]!, s[at + 1]!) > Math.hypot(c[at]!, s[at]!)) at++
  return at
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
