import type { Spans } from '../../timeline/spans.ts'

const MINUTE_MS = 60_000
export const DAY_MINUTES = 1_440
/** Spans longer than this are walked in steps of five minutes. */
const LONG_MS = 45 * 24 * 60 * MINUTE_MS

/**
 * A circle of 1,440 minutes stretched by the energised time that each minute had, so that minutes without supply take
 * no room: events at a constant rate lie evenly on it, however the supply came and went.
 */
export interface DayCircle {
  /** Place of an instant, [0, 1). */
  readonly placeOf: (ms: number) => number
  /** Minute of the day that has this place, [0, 1440). */
  readonly minuteAt: (place: number) => number
}

/** `minuteOf` gives an instant's minute on the circle: of the local day, or from sunset. Linear in minutes of the span. */
export function dayCircle(energised: Spans, minuteOf: (ms: number) => number): DayCircle {
  const upTo = energisedUpTo(energised, minuteOf)
  const total = upTo[DAY_MINUTES]!
  return {
    placeOf: (ms) => {
      const minute = Math.min(DAY_MINUTES - 1e-9, minuteOf(ms))
      const whole = Math.floor(minute)
      const before = upTo[whole]! + (upTo[whole + 1]! - upTo[whole]!) * (minute - whole)
      return total === 0 ? minute / DAY_MINUTES : Math.min(1 - 1e-12, before / total)
    },
    minuteAt: (place) => {
      const wanted = (place - Math.floor(place)) * total
      let minute = 0
      while (minute < DAY_MINUTES - 1 && upTo[minute + 1]! <= wanted) minute++
      const here = upTo[minute + 1]! - upTo[minute]!
      return minute + (here === 0 ? 0 : Math.min(1, (wanted - upTo[minute]!) / here))
    },
  }
}

/** Energised minutes before each minute of the circle, summed over all days; 1,441 entries. */
function energisedUpTo(energised: Spans, minuteOf: (ms: number) => number): Float64Array {
  const upTo = new Float64Array(DAY_MINUTES + 1)
  const span = energised.length === 0 ? 0 : energised.at(-1)! - energised[0]!
  const step = (span > LONG_MS ? 5 : 1) * MINUTE_MS
  for (let i = 0; i < energised.length; i += 2) {
    for (let t = energised[i]!; t < energised[i + 1]!; t += step) {
      const length = Math.min(step, energised[i + 1]! - t) / MINUTE_MS
      const first = Math.floor(minuteOf(t + (length * MINUTE_MS) / 2) - length / 2 + 0.5)
      const parts = Math.max(1, Math.round(length))
      for (let k = 0; k < parts; k++) {
        const minute = (((first + k) % DAY_MINUTES) + DAY_MINUTES) % DAY_MINUTES
        upTo[minute + 1]! += length / parts
      }
    }
  }
  for (let m = 1; m <= DAY_MINUTES; m++) upTo[m]! += upTo[m - 1]!
  return upTo
}
