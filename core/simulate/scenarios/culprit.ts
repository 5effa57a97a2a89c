import { type Draws, draws } from '../draws.ts'
import type { LoadFault, LoadPlan } from '../installation.ts'
import { conductiveTo } from '../phasor.ts'
import { type Ground, soundLevels } from './ground.ts'

/** Conductive mA that lifts a ground's usual level to its trip current: the scale of every fault. */
export function neededMa(ground: Ground): number {
  const { median } = soundLevels(ground)
  return conductiveTo(median, ground.installation.rcds[0]!.tripMa)
}

/** A load of the ground that people use or a thermostat runs, some times a day but not most of the time, and its circuit. */
export function pickCulprit(ground: Ground, random: Draws): { readonly load: LoadPlan; readonly circuit: number } {
  const all = ground.installation.rcds[0]!.circuits.flatMap((plan, circuit) =>
    plan.loads.map((load) => ({ load, circuit })),
  )
  const fit = all.filter(({ load: { habit } }) => {
    if (habit.kind === 'cycle') return habit.onMinutes < 1.2 * habit.offMinutes
    return habit.kind === 'runs' && habit.perDay >= 0.7
  })
  return random.pick(fit.length > 0 ? fit : all)
}

/** A fault of a kind, its figures drawn wide, at a strength in mA. */
export function drawFault(kind: LoadFault['kind'], mA: number, seed: number): LoadFault {
  const random = draws(seed, 'fault')
  switch (kind) {
    case 'when-on':
      return { kind, mA, spread: random.between(0.1, 0.3) }
    case 'in-run':
      return { kind, mA: 1.3 * mA, spread: 0.35, perHour: random.between(0.5, 4), seconds: random.logNormal(3, 1) }
    case 'warming': {
      const riseMinutes = random.between(1.5, 6)
      const dryMinutes = random.between(6, 25)
      return {
        kind,
        mA: 1.6 * mA,
        spread: random.between(0.1, 0.3),
        riseMinutes,
        dryMinutes,
        dampHours: random.between(1, 6),
      }
    }
    default:
      return kind satisfies never
  }
}
