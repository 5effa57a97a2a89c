import { hashText } from '../../statistics/hash-text.ts'
import { energisedClock } from '../energised-clock.ts'
import type { ExposureWindow } from '../line-up.ts'
import { isDaily } from './clock-windows.ts'
import { type Frame, HOUR_MS, MINUTE_MS } from './trip-share.ts'

/** Into how many bins a period is cut, and how many neighbouring ones a window is. */
const BINS = 33
const BINS_WIDE = [2, 5] as const
const VAGUE_MS = 20 * MINUTE_MS
/** Fewer trips than this show no period. */
const LEAST_TRIPS_FOR_PERIOD = 4
/** A period must be seen in so many of its turns. */
const LEAST_TURNS = 3
/** A whole turn as an unsigned number of 32 bits: adding to phases then wraps by itself. */
const TURN = 2 ** 32
/** Phases are taken anew after so many frequencies, before rounding adds up to anything. */
const FRESH_STEPS = 4_096

/** Windows that hold the same trips and as much of the time: the data cannot tell them apart. */
interface Alike {
  count: number
  /** Frequency steps and first bins of the first of them, as long as the steps are neighbours: the longest periods. */
  readonly steps: number[]
  readonly bins: number[]
}

/**
 * A fixed period other than the day: phase windows of periods from 1 h to 10 days (but at most a third of the span),
 * the frequencies close enough together that no phase is missed. Windows of one width that hold the same trips have the
 * same likelihood; one of the longest period stands for
 * all of them, with their priors: half a period, a third … hold the same trips.
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
  const step = 0.04 / spanHours
  const steps = Math.ceil((1 - 1 / longest) / step)
  const prior = 1 / (clocks.length * BINS_WIDE.length * (steps + 1) * BINS)
  const frequencyAt = (s: number): number => 1 / longest + s * step
  return clocks.flatMap((at, c) => {
    const exact = at.filter((_, i) => !isVague[i])
    const groups = alikeWindows(exact, steps, frequencyAt, (s) => isDaily(1 / frequencyAt(s), spanHours))
    return BINS_WIDE.flatMap((wide, w) =>
      [...groups[w]!.values()].flatMap((alike) => {
        const middle = alike.steps.length >> 1
        const frequency = frequencyAt(alike.steps[middle]!)
        const bin = alike.bins[middle]!
        if (turnsHeld(exact, frequency, bin, wide) < LEAST_TURNS) return []
        return [
          phaseWindow(frame, at, isVague, {
            frequency,
            from: bin,
            wide,
            prior: prior * alike.count,
            underSupply: c === 1,
          }),
        ]
      }),
    )
  })
}

/** In how many different turns of the period the trips of a window lie: a burst of trips is no period. */
function turnsHeld(exact: readonly number[], frequency: number, from: number, wide: number): number {
  const turns = new Set<number>()
  for (const t of exact) {
    const bin = binOf(turn(t * frequency) * TURN)
    if ((bin - from + BINS) % BINS < wide) turns.add(Math.floor(t * frequency - from / BINS))
  }
  return turns.size
}

/**
 * For each width, the windows with more trips than their share, gathered by the trips they hold. A window with no more is no evidence
 * for the period; its prior is kept all the same. Cost: frequencies × trips.
 */
function alikeWindows(
  exact: readonly number[],
  steps: number,
  frequencyAt: (s: number) => number,
  isLeftOut: (s: number) => boolean,
): readonly Map<number, Alike>[] {
  const groups = BINS_WIDE.map(() => new Map<number, Alike>())
  const least = BINS_WIDE.map((wide) => Math.max(3, (3 * wide * exact.length) / BINS))
  const phases = new Uint32Array(exact.length)
  const turns = Uint32Array.from(exact, (t) => turn(t * (frequencyAt(1) - frequencyAt(0))) * TURN)
  const counts = new Uint32Array(BINS)
  // a set of trips is known by the sums of two marks of each
  const marks = Uint32Array.from(exact, (_, i) => hashText(`trip ${i}`))
  const others = Uint32Array.from(exact, (_, i) => hashText(`trip ${i}`, 1) >>> 12)
  const binMarks = new Uint32Array(BINS)
  const binOthers = new Uint32Array(BINS)
  for (let s = 0; s <= steps; s++) {
    if (s % FRESH_STEPS === 0) {
      for (let i = 0; i < phases.length; i++) phases[i] = turn(exact[i]! * frequencyAt(s)) * TURN
    }
    counts.fill(0)
    for (let i = 0; i < phases.length; i++) {
      const phase = phases[i]!
      counts[binOf(phase)]! += 1
      phases[i] = phase + turns[i]!
    }
    if (mayHold(counts, least) && !isLeftOut(s)) {
      binMarks.fill(0)
      binOthers.fill(0)
      for (let i = 0; i < phases.length; i++) {
        const bin = binOf((phases[i]! - turns[i]!) >>> 0)
        binMarks[bin]! += marks[i]!
        binOthers[bin]! += others[i]!
      }
      BINS_WIDE.forEach((wide, w) => {
        let next = 0
        for (let k = 0; k < wide - 1; k++) next += counts[k]!
        for (let k = 0; k < BINS; k++) {
          const hits = next + counts[(k + wide - 1) % BINS]!
          next = hits - counts[k]!
          if (hits < least[w]!) continue
          let mark = 0
          let other = 0
          for (let b = k; b < k + wide; b++) {
            mark = (mark + binMarks[b % BINS]!) >>> 0
            other += binOthers[b % BINS]!
          }
          const key = (other % 2 ** 20) * TURN + mark
          const alike = groups[w]!.get(key)
          if (alike === undefined) {
            groups[w]!.set(key, { count: 1, steps: [s], bins: [k] })
            continue
          }
          alike.count++
          if (s > alike.steps.at(-1)! + 1 || alike.steps.length < alike.count - 1) continue
          alike.steps.push(s)
          alike.bins.push(k)
        }
      })
    }
  }
  return groups
}

/** Bin of a phase of 32 bits. */
function binOf(phase: number): number {
  return ((phase >>> 16) * BINS) >>> 16
}

/** Whether some window of neighbouring bins holds enough trips. */
function mayHold(counts: Uint32Array, least: readonly number[]): boolean {
  for (let w = 0; w < BINS_WIDE.length; w++) {
    const wide = BINS_WIDE[w]!
    let hits = 0
    for (let k = 0; k < wide - 1; k++) hits += counts[k]!
    for (let k = 0; k < BINS; k++) {
      hits += counts[(k + wide - 1) % BINS]!
      if (hits >= least[w]!) return true
      hits -= counts[k]!
    }
  }
  return false
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
    const bin = Math.min(BINS - 1, Math.floor(turn(t * frequency) * BINS))
    return (bin - from + BINS) % BINS < wide ? 1 : 0
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
