import type { Draws } from './draws.ts'
import type { Habit } from './habit.ts'
import type { LoadPlan } from './installation.ts'

const EVENING = [1, 0, 0, 0, 0, 0, 1, 2, 2, 1, 1, 2, 3, 2, 2, 2, 3, 5, 8, 10, 10, 9, 6, 3]
const MEALS = [0, 0, 0, 0, 0, 1, 5, 8, 5, 3, 3, 5, 9, 6, 2, 2, 3, 5, 8, 6, 3, 2, 1, 0]
const DAYTIME = [0, 0, 0, 0, 0, 0, 2, 5, 8, 9, 9, 9, 7, 7, 8, 8, 7, 5, 4, 3, 2, 1, 0, 0]
const NIGHT = [8, 8, 8, 8, 7, 6, 3, 1, 0, 0, 0, 0, 0, 0, 0, 0, 0, 1, 2, 3, 5, 7, 8, 8]

const runs = (profile: readonly number[], perDay: number, minutes: number, spread = 0.4): Habit => ({
  kind: 'runs',
  profile,
  perDay,
  minutes,
  spread,
})
const cycle = (onMinutes: number, offMinutes: number): Habit => ({ kind: 'cycle', onMinutes, offMinutes, spread: 0.25 })

/**
 * Ordinary loads: habit, A, conductive and capacitive mA while on, capacitive mA while off. Leakages lie within the limits
 * of IEC 60335-1 clause 13.2 (from memory): 0.75 mA for portable class I, up to 5 mA for large heating, 3.5 mA for motors and
 * electronics with large filters.
 */
const KINDS: Readonly<Record<string, readonly [Habit, number, number, number, number]>> = {
  fridge: [cycle(16, 34), 0.6, 0.05, 0.3, 0.1],
  freezer: [cycle(22, 28), 0.8, 0.06, 0.35, 0.1],
  'cold-room': [cycle(18, 20), 4, 0.1, 0.7, 0.2],
  kettle: [runs(MEALS, 6, 4), 9, 0.15, 0.1, 0],
  oven: [runs(MEALS, 1.6, 55), 11, 0.4, 0.9, 0.2],
  hob: [runs(MEALS, 3, 25), 14, 0.3, 1.6, 0.6],
  dishwasher: [runs(EVENING, 0.9, 85, 0.2), 6, 0.25, 0.5, 0.1],
  'washing-machine': [runs(DAYTIME, 1, 80, 0.3), 5, 0.25, 0.9, 0.3],
  dryer: [runs(DAYTIME, 0.8, 70, 0.3), 9, 0.3, 0.8, 0.2],
  computer: [runs(DAYTIME, 2.5, 150), 0.8, 0, 1.3, 0.6],
  television: [runs(EVENING, 2, 110), 0.5, 0, 0.5, 0.3],
  boiler: [cycle(30, 190), 8.7, 0.2, 0.2, 0],
  'heat-pump': [cycle(40, 35), 6, 0.1, 2.2, 1.1],
  pump: [cycle(7, 55), 1.2, 0.05, 0.3, 0],
  heater: [runs(EVENING, 2.5, 65), 7, 0.3, 0.1, 0],
  charger: [runs(NIGHT, 1.2, 210), 10, 0, 1.6, 0.8],
  saw: [runs(DAYTIME, 5, 12, 0.6), 7, 0.1, 0.4, 0],
  'air-compressor': [cycle(5, 40), 8, 0.1, 0.5, 0],
  prover: [runs(NIGHT, 1.5, 180, 0.2), 9, 0.4, 1.8, 0.5],
  mixer: [runs(DAYTIME, 8, 15), 8, 0.1, 0.9, 0.3],
}

/** Names of the ordinary loads. */
export const APPLIANCES: readonly string[] = Object.keys(KINDS)

/** One of the ordinary loads as it stands in one place: every figure drawn round the usual one. Listed, and monitored. */
export function drawAppliance(name: string, random: Draws): LoadPlan {
  const [habit, amps, g, onB, idleB] = KINDS[name] ?? KINDS.heater!
  const about = (value: number): number => value * random.logNormal(1, 0.25)
  return {
    ref: name,
    habit: varied(habit, random),
    amps: about(amps),
    on: { g: about(g), b: about(onB) },
    idle: { g: 0, b: about(idleB) },
    resumes: habit.kind === 'cycle' || random.chance(0.4),
    listed: true,
    monitored: true,
  }
}

function varied(habit: Habit, random: Draws): Habit {
  const about = (value: number): number => value * random.logNormal(1, 0.2)
  if (habit.kind === 'runs') return { ...habit, perDay: about(habit.perDay), minutes: about(habit.minutes) }
  if (habit.kind === 'cycle') {
    return { ...habit, onMinutes: about(habit.onMinutes), offMinutes: about(habit.offMinutes) }
  }
  return habit
}
