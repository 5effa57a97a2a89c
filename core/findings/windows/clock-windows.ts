import { localClock } from '../../timeline/local-clock.ts'
import { energisedClock } from '../energised-clock.ts'
import type { ExposureWindow } from '../line-up.ts'
import { type Frame, HOUR_MS, MINUTE_MS } from './trip-share.ts'

const DAY_MINUTES = 1_440
/** Widths of a daily window that are tried, minutes, and how many of them go round the clock. */
const WIDTHS = [10, 20, 40, 90, 180] as const
/** Into how many bins a period is cut, and how many neighbouring ones a window is. */
const BINS = 33
const BINS_WIDE = [2, 5] as const
/** A period must be seen in so many of its turns. */
const LEAST_TURNS = 3
const VAGUE_MS = 20 * MINUTE_MS
/** Fewer trips than this show no period. */
const LEAST_TRIPS_FOR_PERIOD = 4

/** Energised time by local minute of the day, h, and each trip's share in it. */
interface DayProfile {
  readonly hours: Float64Array
  readonly trips: readonly Float64Array[]
}

/**
 * The same clock time every day: windows of several widths round the clock, each overlapping the next by half.
 * All of them together share one suspect's prior, so that trying many is paid for (Naus 1965 in spirit; here by
 * averaging instead of a corrected p-value).
 */
export function clockWindows(frame: Frame): ExposureWindow[] {
  const profile = dayProfile(frame)
  const hours = running(profile.hours)
  const lively = frame.habits.map((habit) => running(profile.hours.map((h, minute) => h * habit.at(minute))))
  const trips = profile.trips.map(running)
  const wall = localClock(frame.timeline.sheet.timeZone)
  const days = frame.trips.map(({ from }) => wall.dayNumber(from))
  const windows: ExposureWindow[] = []
  for (const width of WIDTHS) {
    const step = width / 2
    const count = DAY_MINUTES / step
    for (let k = 0; k < count; k++) {
      const start = k * step
      const exposed = between(hours, start, start + width)
      if (exposed <= 0.05) continue
      const inside = Float64Array.from(trips, (t) => between(t, start, start + width))
      // several trips of one day are a burst, not a clock time
      if (inside.filter((x) => x > 0.5).length >= 2 && new Set(days.filter((_, i) => inside[i]! > 0.5)).size < 2)
        continue
      windows.push({
        key: `${clockText(start)}+${width}`,
        words: `between ${clockText(start)} and ${clockText(start + width)}`,
        prior: 1 / (WIDTHS.length * count),
        hoursBy: lively.map((sums) => between(sums, start, start + width)),
        insideHours: exposed,
        inside,
        weightsBy: frame.habits.map(() => inside),
      })
    }
  }
  return windows
}

/**
 * A fixed period other than the day: phase windows of periods from 1 h to 10 days (but at most a third of the span),
 * the frequencies close enough together that no phase is missed.
 */
export function periodWindows(frame: Frame): ExposureWindow[] {
  const { from, to } = frame.timeline
  const spanHours = (to - from) / HOUR_MS
  const longest = Math.min(240, spanHours / 3)
  // a trip known no closer than this says nothing of a phase
  const isVague = frame.trips.map((trip) => trip.to - trip.from > VAGUE_MS)
  const known = isVague.filter((vague) => !vague).length
  if (known < LEAST_TRIPS_FOR_PERIOD || longest < 2) return []
  const middles = frame.trips.map((t) => (t.from + t.to) / 2)
  // a timer behind the device stands still while it is open: both clocks are tried
  const clocks = [middles.map((t) => (t - from) / HOUR_MS), middles.map(energisedClock(frame.timeline))]
  const windows: ExposureWindow[] = []
  const step = 0.04 / spanHours
  const steps = Math.ceil((1 - 1 / longest) / step)
  const prior = 1 / (clocks.length * BINS_WIDE.length * (steps + 1) * BINS)
  const counts = new Uint32Array(2 * BINS)
  for (const [c, at] of clocks.entries()) {
    const exact = at.filter((_, i) => !isVague[i])
    // phases are turned on from one frequency to the next, which is cheaper than to take them anew
    const phases = Float64Array.from(exact, (t) => turn(t / longest))
    const turns = Float64Array.from(exact, (t) => turn(t * step))
    for (let s = 0; s <= steps; s++) {
      counts.fill(0)
      for (let i = 0; i < phases.length; i++) {
        counts[(phases[i]! * BINS) | 0]! += 1
        const next = phases[i]! + turns[i]!
        phases[i] = next >= 1 ? next - 1 : next
      }
      const frequency = 1 / longest + s * step
      if (isDaily(1 / frequency, spanHours)) continue
      counts.copyWithin(BINS, 0, BINS)
      for (const wide of BINS_WIDE) {
        // a window with no more trips than its share is no evidence for the period; its prior is kept all the same
        const least = Math.max(3, (3 * wide * known) / BINS)
        let hits = 0
        for (let k = 0; k < wide - 1; k++) hits += counts[k]!
        for (let k = 0; k < BINS; k++) {
          hits += counts[k + wide - 1]!
          if (hits >= least && turnsHeld(at, isVague, frequency, k, wide) >= LEAST_TURNS)
            windows.push(phaseWindow(frame, at, isVague, { frequency, from: k, wide, prior, underSupply: c === 1 }))
          hits -= counts[k]!
        }
      }
    }
  }
  return windows
}

/** In how many different turns of the period the trips of a window lie: a burst of trips is none. */
function turnsHeld(
  at: readonly number[],
  isVague: readonly boolean[],
  frequency: number,
  from: number,
  wide: number,
): number {
  const turns = new Set<number>()
  at.forEach((t, i) => {
    if (!isVague[i] && isInBins(t * frequency, from, wide)) turns.add(Math.floor(t * frequency - from / BINS))
  })
  return turns.size
}

function isInBins(turns: number, from: number, wide: number): boolean {
  const bin = Math.min(BINS - 1, Math.floor(turn(turns) * BINS))
  return (bin - from + BINS) % BINS < wide
}

interface Phase {
  readonly frequency: number
  /** First bin and number of bins. */
  readonly from: number
  readonly wide: number
  readonly prior: number
  readonly underSupply: boolean
}

function phaseWindow(
  frame: Frame,
  at: readonly number[],
  isVague: readonly boolean[],
  { frequency, from, wide, prior, underSupply }: Phase,
): ExposureWindow {
  const hours = 1 / frequency
  const width = wide / BINS
  const inside = Float64Array.from(at, (t, i) => {
    if (isVague[i]) return width
    return isInBins(t * frequency, from, wide) ? 1 : 0
  })
  const clock = underSupply ? ' under supply' : ''
  return {
    key: `${hours.toFixed(3)}h@${(from / BINS).toFixed(2)}+${width.toFixed(2)}${clock}`,
    words: `in the same ${Math.round(width * 100)} % of a period of ${hours.toFixed(1)} h${clock}`,
    prior,
    hoursBy: frame.habits.map(() => frame.hours * width),
    insideHours: frame.hours * width,
    inside,
    weightsBy: frame.habits.map(() => inside),
  }
}

/** A number of turns less the whole ones, [0, 1). */
function turn(turns: number): number {
  return Math.min(turns - Math.floor(turns), 1 - Number.EPSILON)
}

/** Whole multiples of a day, and a day in up to so many equal parts, belong to the clock on the wall. */
const PARTS_OF_A_DAY = 6

/** Whether a period cannot be told from a clock time (or a few of them) over a span. */
export function isDaily(hours: number, spanHours: number): boolean {
  const ratio = hours >= 24 ? hours / 24 : 24 / hours
  const whole = Math.round(ratio)
  if (hours < 24 && whole > PARTS_OF_A_DAY) return false
  // a phase that drifts by less than a quarter over the span looks fixed
  const slack = Math.max(0.005, hours / spanHours / 4)
  return Math.abs(ratio - whole) < slack * whole
}

function dayProfile(frame: Frame): DayProfile {
  const { timeline } = frame
  const clock = localClock(timeline.sheet.timeZone)
  const hours = new Float64Array(DAY_MINUTES)
  for (let i = 0; i < timeline.energised.length; i += 2) {
    spread(hours, clock.minuteOfDay, timeline.energised[i]!, timeline.energised[i + 1]!, 1 / HOUR_MS)
  }
  const trips = frame.trips.map(({ from, to }) => {
    const share = new Float64Array(DAY_MINUTES)
    if (to - from < MINUTE_MS) share[Math.floor(clock.minuteOfDay(from)) % DAY_MINUTES] = 1
    else spread(share, clock.minuteOfDay, from, to, 1 / (to - from))
    return share
  })
  return { hours, trips }
}

/** Adds the time of [from, to), times `scale`, to the minutes of the day it falls in. */
function spread(
  into: Float64Array,
  minuteOfDay: (ms: number) => number,
  from: number,
  to: number,
  scale: number,
): void {
  let at = from
  while (at < to) {
    const minute = minuteOfDay(at)
    const whole = Math.floor(minute)
    // within a quarter of an hour no zone changes its offset: walk minute by minute, ask the clock again then
    const stop = Math.min(to, (Math.floor(at / (15 * MINUTE_MS)) + 1) * 15 * MINUTE_MS)
    let m = whole
    let edge = at + (whole + 1 - minute) * MINUTE_MS
    while (at < stop) {
      const next = Math.min(stop, edge)
      into[m % DAY_MINUTES]! += (next - at) * scale
      at = next
      edge += MINUTE_MS
      m++
    }
  }
}

/** Running sums over two days, so that windows may pass midnight. */
function running(minutes: Float64Array): Float64Array {
  const sums = new Float64Array(2 * DAY_MINUTES + 1)
  for (let i = 0; i < 2 * DAY_MINUTES; i++) sums[i + 1] = sums[i]! + minutes[i % DAY_MINUTES]!
  return sums
}

function between(sums: Float64Array, from: number, to: number): number {
  return sums[to]! - sums[from]!
}

/** Minutes of the day as HH:MM. */
export function clockText(minutes: number): string {
  const m = Math.round(minutes) % DAY_MINUTES
  return `${String(Math.floor(m / 60)).padStart(2, '0')}:${String(m % 60).padStart(2, '0')}`
}
