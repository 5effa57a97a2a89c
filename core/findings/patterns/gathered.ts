import { fullestArc } from './circle-scan.ts'

const ROUNDS = 25
/** A gathering is no narrower than this share of the circle: a minute of a day. */
const NARROWEST = 1 / 1_440
const BROADEST = 1 / 6
/** The arc from which the fit begins. */
const START_WIDTH = 1 / 18

/** A gathering on a circle of length one, among events at random. */
export interface Gathered {
  readonly middle: number
  /** Standard deviation of the events that gather. */
  readonly spread: number
  /** Share of events that gather. */
  readonly share: number
  /** Log-likelihood over that of an even spread. */
  readonly gain: number
}

/**
 * Fits one normal gathering and an even rest to places on a circle of length one, by expectation–maximisation (Dempster, Laird &
 * Rubin 1977) from the fullest arc. A few events at other times do not blunt it. Shape: at least one place in [0, 1).
 */
export function gathered(places: readonly number[]): Gathered {
  let middle = fullestMiddle(places)
  let spread = START_WIDTH / 2
  let share = 0.5
  let gain = 0
  for (let round = 0; round < ROUNDS; round++) {
    let [weight, shift, square] = [0, 0, 0]
    gain = 0
    for (const place of places) {
      const away = wayOn(place, middle)
      const near = (share / (spread * Math.sqrt(2 * Math.PI))) * Math.exp(-(away * away) / (2 * spread * spread))
      const whole = near + (1 - share)
      const w = near / whole
      gain += Math.log(whole)
      weight += w
      shift += w * away
      square += w * away * away
    }
    if (weight < 1e-9) break
    const moved = shift / weight
    middle += moved
    spread = Math.min(BROADEST, Math.max(NARROWEST, Math.sqrt(Math.max(0, square / weight - moved * moved))))
    share = Math.min(0.99, Math.max(0.01, weight / places.length))
  }
  return { middle: middle - Math.floor(middle), spread, share, gain }
}

/** Signed way from b to a on the circle, in [−½, ½). */
function wayOn(a: number, b: number): number {
  const way = a - b + 0.5
  return way - Math.floor(way) - 0.5
}

/** The middle of the arc that holds most places. */
function fullestMiddle(places: readonly number[]): number {
  const sorted = Float64Array.from(places).sort()
  const most = fullestArc(sorted, START_WIDTH)
  const n = sorted.length
  for (let i = 0; i < n; i++) {
    const last = i + most - 1
    const end = last < n ? sorted[last]! : sorted[last - n]! + 1
    if (end - sorted[i]! <= START_WIDTH) return (sorted[i]! + end) / 2
  }
  return sorted[0]!
}
