import { seededRandom } from '../../../../core/statistics/random.ts'
import type { Series } from '../../../../core/timeline/series.ts'
import { sunTimes } from '../../../../core/timeline/sun.ts'
import { HOUR, MINUTE, START } from '../timeline-of.ts'

const DAY = 24 * HOUR

/** A load of a made-up log: what it adds, how long, and when it starts. */
export interface MadeTimer {
  readonly ma: number
  readonly minutes: number
  readonly starts: readonly number[]
}

export interface MadeRemainder {
  readonly days: number
  readonly timers: readonly MadeTimer[]
  /** Deviation of a minute's mean, mA. */
  readonly noise?: number
  /** Deviation of a slow wander (Ornstein–Uhlenbeck, three hours), mA. */
  readonly wander?: number
  /** A compressor that cycles of its own, 0.6 mA for a quarter of an hour. */
  readonly cycling?: boolean
  /** Loads that people use, at meals and in the evening, of any height and length. */
  readonly people?: boolean
}

/** Minute means of 15 mA with wander, noise, and loads whose truth is known. */
export function madeRemainder(made: MadeRemainder, seed: number): Series {
  const random = seededRandom(`remainder ${seed}`)
  const n = made.days * 1_440
  const t = Float64Array.from({ length: n }, (_, i) => START + i * MINUTE)
  const v = new Float64Array(n)
  const keep = Math.exp(-1 / 180)
  let wander = 0
  for (let i = 0; i < n; i++) {
    wander = keep * wander + random.normal(0, (made.wander ?? 0.1) * Math.sqrt(1 - keep * keep))
    v[i] = 15 + wander + random.normal(0, made.noise ?? 0.05)
  }
  const add = (from: number, minutes: number, ma: number): void => {
    const to = from + minutes * MINUTE
    for (let i = Math.max(0, Math.floor((from - START) / MINUTE)); i < n && t[i]! < to; i++) {
      const overlap = Math.min(to, t[i]! + MINUTE) - Math.max(from, t[i]!)
      v[i]! += (ma * Math.max(0, overlap)) / MINUTE
    }
  }
  for (const timer of made.timers) {
    for (const start of timer.starts) {
      add(start, timer.minutes * (1 + random.normal(0, 0.03)), timer.ma * (1 + random.normal(0, 0.05)))
    }
  }
  if (made.cycling) {
    for (let at = START; at < START + made.days * DAY; ) {
      const on = 15 * (1 + random.normal(0, 0.15))
      add(at, on, 0.6 * (1 + random.normal(0, 0.05)))
      at += (on + 32 * (1 + random.normal(0, 0.2))) * MINUTE
    }
  }
  if (made.people) {
    for (let day = 0; day < made.days; day++) {
      const uses = random.poisson(14)
      for (let i = 0; i < uses; i++) {
        const at = START + day * DAY + random.pick([7, 7.3, 12.2, 18, 19, 20]) * HOUR + random.normal(0, 25) * MINUTE
        add(at, Math.exp(random.normal(Math.log(12), 0.7)), Math.exp(random.normal(Math.log(1.2), 0.6)))
      }
    }
  }
  return { t, v }
}

/** The same UTC hour on each day from START on, or on those whose number modulo seven is given (0 is Monday). */
export function daily(days: number, hour: number, jitter: number, on?: readonly number[]): number[] {
  const random = seededRandom(`daily ${hour}`)
  return Array.from({ length: days }, (_, day) => day)
    .filter((day) => on === undefined || on.includes(day % 7))
    .map((day) => START + day * DAY + hour * HOUR + random.normal(0, jitter) * MINUTE)
}

/** Every so many hours, the first so many hours after START. */
export function every(days: number, hours: number, first: number): number[] {
  const count = Math.floor((days * 24 - first) / hours) + 1
  return Array.from({ length: count }, (_, k) => START + (first + k * hours) * HOUR)
}

/** So many minutes after each sunset at the made timeline's place. */
export function afterSunset(days: number, minutes: number): number[] {
  const random = seededRandom('sunset')
  return Array.from({ length: days }, (_, day) => {
    const { sunset } = sunTimes(START + day * DAY + 12 * HOUR, 47.3, 13.4)
    return sunset! + (minutes + random.normal(0, 2)) * MINUTE
  })
}
