import type { Draws } from './draws.ts'
import type { LoadPlan } from './installation.ts'

const HOUR = 3_600_000

/** Leakage of one load as time goes on, told when it is on and when not. */
export interface LoadState {
  /** Goes on by `dt` ms up to time `t`, with supply (`plugged`) and running or not. Then `g`, `b`, `pulse` hold. */
  step(t: number, dt: number, plugged: boolean, running: boolean): void
  /** mA at `t`. */
  readonly g: number
  readonly b: number
  /** Of `g`, what the fault adds. */
  readonly fault: number
  /** mA that a fault of seconds added at some moment of the step, beyond what `g` shows at its end. */
  readonly pulse: number
}

/** The state of a load, at rest and damp. Draws only from `random`. */
export function loadState(plan: LoadPlan, random: Draws): LoadState {
  const settle = plan.settleSeconds ?? 0
  const extra = faultOf(plan, random)
  let warm = 0
  const state = {
    g: 0,
    b: 0,
    fault: 0,
    pulse: 0,
    step(t: number, dt: number, plugged: boolean, running: boolean): void {
      const goal = running ? 1 : 0
      warm = settle === 0 ? goal : goal + (warm - goal) * Math.exp(-dt / (1_000 * settle))
      const fault = extra.step(t, dt, running)
      state.fault = fault.held
      state.pulse = fault.brief
      // A warm part leaks only with supply on it; `warm` itself outlasts the switch.
      const live = running ? warm : 0
      state.g = (plugged ? plan.idle.g : 0) + live * plan.on.g + fault.held
      state.b = (plugged ? plan.idle.b : 0) + live * plan.on.b
    },
  }
  return state
}

interface Fault {
  step(t: number, dt: number, running: boolean): { readonly held: number; readonly brief: number }
}

function faultOf(plan: LoadPlan, random: Draws): Fault {
  const fault = plan.fault
  if (fault === undefined) return { step: () => ({ held: 0, brief: 0 }) }
  switch (fault.kind) {
    case 'when-on': {
      let strength = 0
      let ran = false
      return {
        step(_t, _dt, running) {
          if (running && !ran) strength = random.logNormal(fault.mA, fault.spread)
          ran = running
          return { held: running ? strength : 0, brief: 0 }
        },
      }
    }
    case 'in-run': {
      const none = Number.POSITIVE_INFINITY
      let next = none
      let end = none
      let strength = 0
      return {
        step(t, dt, running) {
          if (!running) {
            next = none
            end = none
            return { held: 0, brief: 0 }
          }
          if (next === none) next = t - dt + random.exponential(HOUR / fault.perHour)
          let brief = 0
          while (next <= t) {
            if (end === none) {
              strength = random.logNormal(fault.mA, fault.spread)
              end = next + random.exponential(1_000 * fault.seconds)
            }
            if (end > t) return { held: strength, brief: 0 }
            brief = Math.max(brief, strength)
            next = end + random.exponential(HOUR / fault.perHour)
            end = none
          }
          return { held: 0, brief }
        },
      }
    }
    case 'warming': {
      let damp = 1
      let heat = 0
      let strength = 0
      let ran = false
      return {
        step(_t, dt, running) {
          const minutes = dt / 60_000
          if (running && !ran) strength = random.logNormal(fault.mA, fault.spread)
          ran = running
          if (running) {
            heat = 1 - (1 - heat) * Math.exp(-minutes / fault.riseMinutes)
            damp *= Math.exp((-heat * minutes) / fault.dryMinutes)
            return { held: strength * heat * damp, brief: 0 }
          }
          heat *= Math.exp(-minutes / (2 * fault.riseMinutes))
          damp = 1 - (1 - damp) * Math.exp(-dt / (HOUR * fault.dampHours))
          return { held: 0, brief: 0 }
        },
      }
    }
    default:
      return fault satisfies never
  }
}
