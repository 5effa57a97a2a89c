import type { Series } from '../timeline/series.ts'
import type { Moment } from './device-run.ts'
import { draws } from './draws.ts'
import type { Logger } from './installation.ts'
import { magnitude } from './phasor.ts'

const DAY = 86_400_000

/** Columns that grow. */
class Column {
  private t = new Float64Array(1_024)
  private v = new Float64Array(1_024)
  private n = 0

  /** A second value at the same time is left out. */
  push(t: number, v: number): void {
    if (this.n > 0 && t <= this.t[this.n - 1]!) return
    if (this.n === this.t.length) {
      const grow = (old: Float64Array<ArrayBuffer>): Float64Array<ArrayBuffer> => {
        const wider = new Float64Array(2 * old.length)
        wider.set(old)
        return wider
      }
      this.t = grow(this.t)
      this.v = grow(this.v)
    }
    this.t[this.n] = t
    this.v[this.n++] = v
  }

  series(): Series {
    return { t: this.t.slice(0, this.n), v: this.v.slice(0, this.n) }
  }
}

/** Writes down what a logger on one device sees: leakage, states of loads, load current. */
export interface Recorder {
  take(moment: Moment): void
  /** By channel reference, as given. */
  series(): Map<string, Series>
}

/** Channel references of a recorder; null for what is not recorded. */
export interface RecorderChannels {
  readonly leakage: string
  readonly loadCurrent: string | null
  /** For each load in order, the channel of its state. */
  readonly states: readonly (string | null)[]
}

/**
 * A logger on the tails of a device. It reads the r.m.s. magnitude with an error of gain that is its own (within its accuracy), noise
 * of the last places, and its resolution; clips at full scale; is blind in its gaps; stamps by its own clock.
 */
export function recorderOf(
  logger: Logger,
  channels: RecorderChannels,
  from: number,
  flickerMa: number,
  seed: number,
): Recorder {
  const random = draws(seed, `logger ${channels.leakage}`)
  const gain = 1 + random.between(-0.7, 0.7) * (logger.accuracy.percent / 100)
  const noise = Math.hypot(0.2 * logger.accuracy.digits * logger.resolutionMa, flickerMa / 3)
  const places = Math.round(1 / logger.resolutionMa)
  const leakage = new Column()
  const amps = new Column()
  const states = channels.states.map((ref) => (ref === null ? null : new Column()))
  const before = new Uint8Array(states.length)
  let next = from
  let nextStates = from
  return {
    take(moment) {
      const { t, whole } = moment
      const reads = whole && t >= next
      const beats = whole && t >= nextStates
      const changes = logger.statesOnChange && moment.on.some((on, k) => on !== before[k])
      if (!reads && !beats && !changes) return
      if (reads) next += logger.intervalMs
      if (beats) nextStates += logger.statesMs
      const stamp = Math.round(t + logger.clockMs + (logger.clockMsPerDay * (t - from)) / DAY)
      if (logger.gaps.some(([a, b]) => t >= a && t < b)) return
      if (reads) {
        const read = gain * magnitude(moment) + random.normal(0, noise)
        const clipped = Math.min(logger.fullScaleMa, Math.max(0, read))
        leakage.push(stamp, Math.round(clipped * places) / places)
      }
      if (beats && channels.loadCurrent !== null) amps.push(stamp, Math.round(moment.amps * 100) / 100)
      if (beats || changes) {
        for (let k = 0; k < states.length; k++) {
          const on = moment.on[k]!
          if (beats || on !== before[k]) states[k]?.push(stamp, on)
          before[k] = on
        }
      }
    },
    series() {
      const out = new Map([[channels.leakage, leakage.series()]])
      if (channels.loadCurrent !== null) out.set(channels.loadCurrent, amps.series())
      states.forEach((column, k) => {
        const ref = channels.states[k]
        if (column && ref) out.set(ref, column.series())
      })
      return out
    },
  }
}
