import type { CircuitPlan, Installation, LoadPlan, Logger, People } from '../../../core/simulate/installation.ts'
import type { Plan } from '../../../core/simulate/simulate.ts'

export const DAY = 86_400_000
/** Monday, local midnight in Vienna. */
export const START: number = Date.UTC(2026, 8, 20, 22)

export function load(ref: string, more: Partial<LoadPlan> = {}): LoadPlan {
  return {
    ref,
    habit: { kind: 'always' },
    amps: 1,
    on: { g: 0, b: 0 },
    idle: { g: 0, b: 0 },
    resumes: true,
    listed: true,
    monitored: true,
    ...more,
  }
}

export function circuit(ref: string, loads: readonly LoadPlan[], more: Partial<CircuitPlan> = {}): CircuitPlan {
  return { ref, isolation: 'two-pole', standing: { g: 0, b: 0 }, neutralShare: 0, loads, ...more }
}

const PEOPLE: People = { up: 360, down: 1380, resetMinutes: 10, noticed: 1, lateSeconds: 0, suspects: [] }
const LOGGER: Logger = {
  intervalMs: 10_000,
  resolutionMa: 0.01,
  accuracy: { percent: 0, digits: 0 },
  fullScaleMa: 300,
  gaps: [],
  clockMs: 0,
  clockMsPerDay: 0,
  statesMs: 60_000,
  statesOnChange: true,
  loadCurrent: true,
  weather: true,
}

/** A quiet, exact plan of one device for a week: no drift, no flicker, no surges, an ideal logger. */
export function planOf(
  circuits: readonly CircuitPlan[],
  more: Partial<Plan> & { readonly tripMa?: number; readonly isolating?: Installation['isolating'] } = {},
): Plan {
  const { tripMa = 25, isolating = [], ...rest } = more
  return {
    installation: {
      name: 'Village bakery',
      timeZone: 'Europe/Vienna',
      latitude: 47.3,
      longitude: 13.4,
      weather: { spellsPerWeek: 0, meanC: 10, swingC: 4 },
      rcds: [
        {
          ref: 'A',
          ratedMa: 30,
          tripMa,
          circuits,
          drift: { mA: 0, hours: 1 },
          flickerMa: 0,
          surgesPerWeek: 0,
        },
      ],
      isolating,
      sharedSurgesPerWeek: 0,
    },
    people: PEOPLE,
    logger: LOGGER,
    from: START,
    to: START + 7 * DAY,
    seed: 1,
    truth: { rcd: 'A', kind: 'test', causes: [], answers: [] },
    ...rest,
  }
}
