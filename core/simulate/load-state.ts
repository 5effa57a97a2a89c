import type { Draws } from './draws.ts'
import type { LoadFault, LoadPlan } from './installation.ts'

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
  const extra = plan.fault === undefined ? null : faultOf(plan.fault, random)
  let warm = 0
  const state = {
    g: 0,
    b: 0,
    fault: 0,
    pulse: 0,
    step(t: number, dt: number, plugged: boolean, running: boolean): void {
      const goal = running ? 1 : 0
      warm = settle === 0 ? goal : goal + (warm - goal) * Math.exp(-dt / (1_000 * settle))
      if (extra !== null) {
        extra.step(t, dt, running)
        state.fault = extra.held
        state.pulse = extra.brief
      }
      // A warm part leaks only with supply on it; `warm` itself outlasts the switch.
      const live = running ? warm : 0
      state.g = (plugged ? plan.idle.g : 0) + live * plan.on.g + state.fault
      state.b = (plugged ? plan.idle.b : 0) + live * plan.on.b
    },
  }
  return state
}

/** A fault as time goes on: `held` is what it adds at the end of a step, `brief` what it added for less than the step. */
interface Fault {
  held: number
  brief: number
  step(t: number, dt: number, running: boolean): void
}

function faultOf(fault: LoadFault, random: Draws): Fault {
  switch (fault.kind) {
    case 'when-on':
      return leaksWhenOn(fault, random)
    case 'in-run':
      return leaksAtRandom(fault, random)
    case 'warming':
      return leaksWhileWarming(fault, random)
    default:
      return fault satisfies never
  }
}

function leaksWhenOn({ mA, spread }: LoadFault & { kind: 'when-on' }, random: Draws): Fault {
  let strength = 0
  let ran = false
  const state: Fault = {
    held: 0,
    brief: 0,
    step(_t, _dt, running) {
      if (running && !ran) strength = random.logNormal(mA, spread)
      ran = running
      state.held = running ? strength : 0
    },
  }
  return state
}

function leaksAtRandom(fault: LoadFault & { kind: 'in-run' }, random: Draws): Fault {
  const none = Number.POSITIVE_INFINITY
  const pause = (): number => random.exponential(HOUR / fault.perHour)
  let next = none
  let end = none
  let strength = 0
  const state: Fault = {
    held: 0,
    brief: 0,
    step(t, dt, running) {
      state.held = 0
      state.brief = 0
      if (!running) {
        next = none
        end = none
        return
      }
      if (next === none) next = t - dt + pause()
      while (next <= t) {
        if (end === none) {
          strength = random.logNormal(fault.mA, fault.spread)
          end = next + random.exponential(1_000 * fault.seconds)
        }
        if (end > t) {
          state.held = strength
          return
        }
        state.brief = Math.max(state.brief, strength)
        next = end + pause()
        end = none
      }
    },
  }
  return state
}

function leaksWhileWarming(fault: LoadFault & { kind: 'warming' }, random: Draws): Fault {
  let damp = 1
  let heat = 0
  let strength = 0
  let ran = false
  const state: Fault = {
    held: 0,
    brief: 0,
    step(_t, dt, running) {
      const minutes = dt / 60_000
      if (running && !ran) strength = random.logNormal(fault.mA, fault.spread)
      ran = running
      if (running) {
        heat = 1 - (1 - heat) * Math.exp(-minutes / fault.riseMinutes)
        damp *= Math.exp((-heat * minutes) / fault.dryMinutes)
        state.held = strength * heat * damp
      } else {
        heat *= Math.exp(-minutes / (2 * fault.riseMinutes))
        damp = 1 - (1 - damp) * Math.exp(-dt / (HOUR * fault.dampHours))
        state.held = 0
      }
    },
  }
  return state
}
