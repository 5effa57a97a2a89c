import type { RcdPlan } from './installation.ts'

/** What one circuit or load really adds while it is on, mA. */
export interface TrueLine {
  /** By how much the magnitude of the group's residual current changes with it. */
  readonly ma: number
  /** Its own current in both parts. */
  readonly conductiveMa: number
  readonly capacitiveMa: number
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
}

/**
 * The true budget of a device: what each thing adds, as the mean over the time that it is on. Of a load whose fault differs from
 * run to run that is the mean over its runs by their length, so that a run which opens the device at once counts for the moment
 * that it lasted; of a circuit it is taken with whatever runs on it. A part that switching leaves behind (the
 * neutral's, a filter in front of a load's switch) is not in it. Things that were never on are absent.
 */
export function tallyOf(rcd: RcdPlan): Tally & { lines(): Map<string, TrueLine> } {
  const circuits = rcd.circuits.map(({ ref }) => `circuit:${ref}`)
  const loads = rcd.circuits.flatMap((circuit) => circuit.loads.map(({ ref }) => `load:${ref}`))
  const names = [...circuits, ...loads]
  const n = new Float64Array(names.length)
  const ma = new Float64Array(names.length)
  const conductive = new Float64Array(names.length)
  const capacitive = new Float64Array(names.length)
  const tally = {
    g: new Float64Array(names.length),
    b: new Float64Array(names.length),
    on: new Uint8Array(names.length),
    step(g: number, b: number): void {
      const whole = Math.sqrt(g * g + b * b)
      for (let k = 0; k < names.length; k++) {
        if (tally.on[k] === 0) continue
        const ownG = tally.g[k]!
        const ownB = tally.b[k]!
        n[k]! += 1
        ma[k]! += whole - Math.sqrt((g - ownG) ** 2 + (b - ownB) ** 2)
        conductive[k]! += ownG
        capacitive[k]! += ownB
      }
    },
    lines(): Map<string, TrueLine> {
      const lines = new Map<string, TrueLine>()
      names.forEach((of, k) => {
        const count = n[k]!
        if (count === 0) return
        lines.set(of, {
          ma: ma[k]! / count,
          conductiveMa: conductive[k]! / count,
          capacitiveMa: capacitive[k]! / count,
        })
      })
      return lines
    },
  }
  return tally
}
