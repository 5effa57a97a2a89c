import type { Pattern } from '../contract/findings.ts'
import { kuiper, meanDirection, rayleigh } from '../statistics/index.ts'
import { localClock } from '../timeline/local-clock.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { rounded } from './words.ts'

const MINUTE_MS = 60_000
const DAY_MINUTES = 1_440
const SPOKEN = 0.05

/**
 * Whether trips gather at a time of day. Local times are first stretched by the energised time that each minute of the
 * day had, so that hours without supply raise no false alarm; then Rayleigh's test for one gathering and Kuiper's for any shape,
 * the smaller p doubled (Bonferroni).
 *
 * @see Mardia & Jupp (2000), Directional Statistics, sections 6.3.1 and 6.3.2
 */
export function clockPattern(timeline: Timeline, trips: readonly number[]): Pattern {
  const clock = localClock(timeline.sheet.timeZone)
  const upTo = energisedUpTo(timeline, clock.minuteOfDay)
  const total = upTo[DAY_MINUTES]!
  const places = trips.map((t) => {
    const minute = Math.min(DAY_MINUTES - 1e-9, clock.minuteOfDay(t))
    const whole = Math.floor(minute)
    const share = upTo[whole]! + (upTo[whole + 1]! - upTo[whole]!) * (minute - whole)
    return total === 0 ? minute / DAY_MINUTES : share / total
  })
  const gathering = rayleigh(places, 1)
  const shape = kuiper(places, 1)
  const p = Math.min(1, 2 * Math.min(gathering.p, shape.p))
  const { direction } = meanDirection(places, 1)
  const method = "Rayleigh's and Kuiper's tests on local times stretched by energised time (Mardia & Jupp 2000)"
  const figures = { p: rounded(p), method, trips: trips.length, resultant: rounded(gathering.resultant) }
  if (p >= SPOKEN) return { verdict: `No time of day stands out among ${trips.length} trips.`, ...figures }
  if (gathering.p >= SPOKEN || direction === null) {
    return { verdict: `${trips.length} trips do not spread evenly over the day, but round no single time.`, ...figures }
  }
  const localTime = timeOf(upTo, direction * total)
  return { verdict: `${trips.length} trips gather round ${localTime} local time.`, ...figures, localTime }
}

/** Energised minutes before each minute of the local day, summed over all days; 1,441 entries. */
function energisedUpTo({ energised }: Timeline, minuteOfDay: (t: number) => number): Float64Array {
  const upTo = new Float64Array(DAY_MINUTES + 1)
  for (let i = 0; i < energised.length; i += 2) {
    for (let t = energised[i]!; t < energised[i + 1]!; t += MINUTE_MS) {
      const length = Math.min(MINUTE_MS, energised[i + 1]! - t)
      const minute = Math.min(DAY_MINUTES - 1, Math.floor(minuteOfDay(t + length / 2)))
      upTo[minute + 1]! += length / MINUTE_MS
    }
  }
  for (let m = 1; m <= DAY_MINUTES; m++) upTo[m]! += upTo[m - 1]!
  return upTo
}

function timeOf(upTo: Float64Array, energisedMinutes: number): string {
  let minute = 0
  while (minute < DAY_MINUTES - 1 && upTo[minute + 1]! <= energisedMinutes) minute++
  const two = (x: number): string => String(x).padStart(2, '0')
  return `${two(Math.floor(minute / 60))}:${two(minute % 60)}`
}
