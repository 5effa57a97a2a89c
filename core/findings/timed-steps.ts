import { quantile } from '../statistics/quantile.ts'
import { localClock } from '../timeline/local-clock.ts'
import { eachSpan } from '../timeline/spans.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { energisedClock } from './energised-clock.ts'
import type { Unexplained } from './unexplained.ts'
import { isDaily } from './windows/clock-windows.ts'

const HOUR_MS = 3_600_000
const DAY_MINUTES = 1_440
/** Fewer steps than this show no schedule. */
const LEAST_STEPS = 5
/** Steps begin within so many minutes of the same clock time … */
const CLOCK_WIDTH = 20
/** … and so large a share of them does, with one such time a day or with two. */
const ONE_TIME = 0.7
const TWO_TIMES = 0.85
/** Mean resultant length of the phases of a period. */
const SHARP = 0.85
/** Periods whose lengths differ by less fit alike. */
const ALIKE = 0.02
/** Chance of the same from steps at random times, after paying for all that was tried. */
const LEAST_P = 1e-4

/** When the steps that nobody named come. */
export type Schedule =
  | { readonly kind: 'clock'; readonly minute: number }
  | { readonly kind: 'period'; readonly hours: number }
  | { readonly kind: 'none' }

/**
 * The schedule behind excursions that no named load accounts for: a fixed clock time (the fullest window of the local
 * day, its binomial tail paid for by the number of windows: Naus 1965 in spirit), else a fixed period (Rayleigh
 * periodogram of their starts, on the wall's clock and on one that stands still while the device is open, paid for by the number of frequencies: Mardia & Jupp 2000, §6.3).
 */
export function scheduleOf(timeline: Timeline, found: Unexplained): Schedule {
  const starts = [...eachSpan(found.excursions)].map((s) => s.from)
  if (starts.length < LEAST_STEPS) return { kind: 'none' }
  return clockOf(timeline, starts) ?? periodOf(timeline, starts) ?? { kind: 'none' }
}

function clockOf(timeline: Timeline, starts: readonly number[]): Schedule | null {
  const clock = localClock(timeline.sheet.timeZone)
  const all = starts.map((t) => clock.minuteOfDay(t))
  const first = fullest(all)
  const second = fullest(all.filter((m) => !first.inside.includes(m)))
  const slots = DAY_MINUTES / CLOCK_WIDTH
  const one = { share: first.inside.length / all.length, chance: 1 / slots, tried: 2 * slots }
  const two = {
    share: (first.inside.length + second.inside.length) / all.length,
    chance: 2 / slots,
    tried: 2 * slots * slots,
  }
  const isClock = isMoreThanChance(one, all.length, ONE_TIME) || isMoreThanChance(two, all.length, TWO_TIMES)
  return isClock ? { kind: 'clock', minute: first.middle % DAY_MINUTES } : null
}

/** The window of the day that holds most of some clock minutes, and their median in it. */
function fullest(minutes: readonly number[]): { readonly inside: readonly number[]; readonly middle: number } {
  let inside: number[] = []
  let at = 0
  for (const first of minutes) {
    const here = minutes.filter((m) => (m - first + DAY_MINUTES) % DAY_MINUTES <= CLOCK_WIDTH)
    if (here.length > inside.length) {
      inside = here
      at = first
    }
  }
  if (inside.length === 0) return { inside, middle: 0 }
  const later = quantile(
    inside.map((m) => (m - at + DAY_MINUTES) % DAY_MINUTES),
    0.5,
  )
  return { inside, middle: at + later }
}

interface Share {
  readonly share: number
  /** Share that chance would give, and how many windows were tried. */
  readonly chance: number
  readonly tried: number
}

/** By Chernoff's bound of the binomial tail, which is never smaller than the tail itself, times the windows tried. */
function isMoreThanChance({ share, chance, tried }: Share, n: number, least: number): boolean {
  if (share < least) return false
  const rest = share < 1 ? (1 - share) * Math.log((1 - share) / (1 - chance)) : 0
  return tried * Math.exp(-n * (share * Math.log(share / chance) + rest)) <= LEAST_P
}

function periodOf(timeline: Timeline, starts: readonly number[]): Schedule | null {
  const span = (timeline.to - timeline.from) / HOUR_MS
  const onWall = starts.map((t) => (t - timeline.from) / HOUR_MS)
  const step = 0.1 / span
  const tried: { readonly frequency: number; readonly length: number }[] = []
  for (const at of [onWall, starts.map(energisedClock(timeline))]) {
    for (let frequency = Math.max(4 / span, 1 / 240); frequency <= 1; frequency += step) {
      if (isDaily(1 / frequency, span)) continue
      let cos = 0
      let sin = 0
      for (const t of at) {
        cos += Math.cos(2 * Math.PI * frequency * t)
        sin += Math.sin(2 * Math.PI * frequency * t)
      }
      tried.push({ frequency, length: Math.hypot(cos, sin) / at.length })
    }
  }
  const most = tried.reduce((m, { length }) => Math.max(m, length), 0)
  const p = tried.length * Math.exp(-starts.length * most ** 2)
  if (most < SHARP || p > LEAST_P) return null
  // whole fractions of a period fit as well as it does: the longest is the plain one
  const plain = tried
    .filter(({ length }) => length >= most - ALIKE)
    .reduce((a, b) => (b.frequency < a.frequency ? b : a))
  return { kind: 'period', hours: 1 / plain.frequency }
}
