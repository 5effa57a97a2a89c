import type { RcdPlan } from './installation.ts'

/** What one circuit or load really adds while it is on, mA. */
export interface TrueLine {
  /** By how much the magnitude of the group's residual current changes with it. */
  readonly ma: number
  /** Its own current in both parts. */
  readonly conductiveMa: number
  readonly capacitiveMa: number
  /** Runs the means are over; 1 for a circuit. */
  readonly runs: number
}

/** Keeps account of what each thing adds, step by step. Things: the circuits, then the loads, each in the plan's order. */
export interface Tally {
  /** What each thing's switching would take away at this moment, mA; filled in before `step`. */
  readonly g: Float64Array
  readonly b: Float64Array
  /** 1 for a circuit that is on and for a load that runs. */
  readonly on: Uint8Array
  /** Takes a moment of the closed device, given the group's leakage, mA. */
  step(g: number, b: number): void
  /** The device is open: runs are over. */
  interrupt(): void
}

/**
 * The true budget of a device. A load's line is the mean over its runs of what a run adds on average (a fault differs from run to
 * run); a circuit's is the mean over the time that it is on, with whatever runs on it. A part that its switching leaves behind (the
 * neutral's, a filter in front of a load's switch) is not in it. Things that were never on are absent.
 */
export function tallyOf(rcd: RcdPlan): Tally & { lines(): Map<string, TrueLine> } {
  const circuits = rcd.circuits.map(({ ref }) => `circuit:${ref}`)
  const loads = rcd.circuits.flatMap((circuit) => circuit.loads.map(({ ref }) => `load:${ref}`))
  const names = [...circuits, ...loads]
  const means = names.map(() => new RunMean())
  const tally = {
    g: new Float64Array(names.length),
    b: new Float64Array(names.length),
    on: new Uint8Array(names.length),
    step(g: number, b: number): void {
      const whole = Math.sqrt(g * g + b * b)
      for (let k = 0; k < names.length; k++) {
        if (tally.on[k] === 0) {
          if (k >= circuits.length) means[k]!.end()
          continue
        }
        const ownG = tally.g[k]!
        const ownB = tally.b[k]!
        means[k]!.take(whole - Math.sqrt((g - ownG) ** 2 + (b - ownB) ** 2), ownG, ownB)
      }
    },
    interrupt(): void {
      for (let k = circuits.length; k < names.length; k++) means[k]!.end()
    },
    lines(): Map<string, TrueLine> {
      const entries = names.map((of, k) => [of, means[k]!.line()] as const)
      return new Map(entries.flatMap(([of, line]) => (line === null ? [] : [[of, line] as const])))
    },
  }
  return tally
}

/** Mean over runs of the mean within each. */
class RunMean {
  private n = 0
  private readonly held: [number, number, number] = [0, 0, 0]
  private runs = 0
  private readonly sums: [number, number, number] = [0, 0, 0]

  take(ma: number, g: number, b: number): void {
    this.n++
    this.held[0] += ma
    this.held[1] += g
    this.held[2] += b
  }

  end(): void {
    if (this.n === 0) return
    this.runs++
    for (const k of [0, 1, 2] as const) {
      this.sums[k] += this.held[k] / this.n
      this.held[k] = 0
    }
    this.n = 0
  }

  line(): TrueLine | null {
    this.end()
    if (this.runs === 0) return null
    const [ma, conductiveMa, capacitiveMa] = this.sums.map((sum) => sum / this.runs) as [number, number, number]
    return { ma, conductiveMa, capacitiveMa, runs: this.runs }
  }
}
