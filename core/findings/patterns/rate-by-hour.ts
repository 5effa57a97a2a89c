import type { Pattern } from '../../contract/findings.ts'
import { localClock } from '../../timeline/local-clock.ts'
import { contains, intersect, type Spans } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { figure, rounded } from '../words.ts'
import { type Preferred, ratePattern } from './rate-pattern.ts'

const MINUTE_MS = 60_000
const HOURS = 24
/** How finely the exposure of the hours of the day is measured. */
const STEP_MS = 10 * MINUTE_MS
const SPOKEN = 0.05

/**
 * `ratePattern` for what has a daily rhythm of its own (temperature, humidity, load): a preference counts only as far as it
 * goes beyond the hours of the day at which the trips came. Each trip's chance of falling inside is the set's share of
 * its local hour, and the number inside is compared with the sum of such chances (Poisson's binomial, exact: Hodges & Le Cam
 * 1960), times the sets tried. The larger p of both holds.
 */
export function ratePatternByHour(
  timeline: Timeline,
  trips: readonly number[],
  sets: readonly Preferred[],
  otherwise: string,
): Pattern {
  const plain = ratePattern(timeline.energised, trips, sets, otherwise)
  const set = sets.find(({ words }) => words === plain.words)
  if (set === undefined || plain.p === null || plain.p === undefined) return plain
  const known = intersect(set.known, timeline.energised)
  const inside = intersect(set.inside, known)
  const shares = sharesByHour(timeline, inside, known)
  const clock = localClock(timeline.sheet.timeZone)
  const seen = trips.filter((t) => contains(known, t - 1))
  const chances = seen.map((t) => shares[Math.floor(clock.minuteOfDay(t) / 60)]!)
  const within = seen.filter((t) => contains(inside, t - 1)).length
  const expected = chances.reduce((sum, chance) => sum + chance, 0)
  const adjusted = Math.min(1, Number(plain.tried) * twoSided(within, chances))
  const figures = { hourAdjustedP: rounded(adjusted), hourExpected: rounded(expected) }
  if (plain.p >= SPOKEN || adjusted < SPOKEN) return { ...plain, p: rounded(Math.max(plain.p, adjusted)), ...figures }
  const verdict = `${plain.verdict.replace(/^(More|Fewer) trips than chance:/, 'No preference of its own:').replace(/\.$/, '')}, and ${figure(expected)} would at the hours of the day at which they came.`
  return { ...plain, verdict, p: rounded(adjusted), ...figures }
}

/** For each local hour the share of its known energised time that lies inside; of all time where an hour has none. */
function sharesByHour({ sheet, from, to }: Timeline, inside: Spans, known: Spans): Float64Array {
  const clock = localClock(sheet.timeZone)
  const [within, all] = [new Float64Array(HOURS), new Float64Array(HOURS)]
  let [i, k] = [0, 0]
  for (let t = from + STEP_MS / 2; t < to; t += STEP_MS) {
    while (i < inside.length && inside[i + 1]! <= t) i += 2
    while (k < known.length && known[k + 1]! <= t) k += 2
    if (!(k < known.length && known[k]! <= t)) continue
    const hour = Math.floor(clock.minuteOfDay(t) / 60)
    all[hour]!++
    if (i < inside.length && inside[i]! <= t) within[hour]!++
  }
  const sum = (column: Float64Array): number => column.reduce((a, b) => a + b, 0)
  const usual = sum(within) / Math.max(1, sum(all))
  return all.map((count, hour) => (count === 0 ? usual : within[hour]! / count))
}

/** Twice the smaller tail of the number of successes among trials of unequal chances. */
export function twoSided(within: number, chances: readonly number[]): number {
  let pmf = [1]
  for (const chance of chances) {
    const next = new Array<number>(pmf.length + 1).fill(0)
    pmf.forEach((p, n) => {
      next[n]! += p * (1 - chance)
      next[n + 1]! += p * chance
    })
    pmf = next
  }
  const lower = pmf.slice(0, within + 1).reduce((a, b) => a + b, 0)
  const upper = pmf.slice(within).reduce((a, b) => a + b, 0)
  return Math.min(1, 2 * Math.min(lower, upper))
}
