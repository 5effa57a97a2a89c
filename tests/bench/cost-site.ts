// The sites whose findings the cost bench times: the simulator lives through them; circuits' own channels are read off its states.
import { SiteSheet } from '../../core/contract/index.ts'
import { APPLIANCES, drawAppliance } from '../../core/simulate/appliances.ts'
import type { Moment } from '../../core/simulate/device-run.ts'
import { draws } from '../../core/simulate/draws.ts'
import type { CircuitPlan, Installation, LoadPlan, Logger, People } from '../../core/simulate/installation.ts'
import { raisedTo } from '../../core/simulate/scenarios/ground.ts'
import { type Plan, simulate, weatherOf } from '../../core/simulate/simulate.ts'
import type { Simulated } from '../../core/simulate/simulated.ts'
import { wetness } from '../../core/simulate/weather.ts'

const HOUR = 3_600_000
const DAY = 24 * HOUR
const FROM = Date.UTC(2026, 8, 21)
const CIRCUITS = 7
const TRIP_MA = 24
const OUTDOOR = { mA: 6, lagHours: 2, decayHours: 8, soakMm: 6 }

export interface CostWish {
  readonly days: number
  readonly intervalMs: number
  readonly loads: number
  /** About so many trips. */
  readonly trips: number
  /** How often states and the load current are written beside their changes; by default once a minute. */
  readonly statesMs?: number
  readonly seed?: number
}

/**
 * A device with seven circuits, each with its own leakage channel beside that on the tails, so many loads (three of four with a running
 * channel, the others written down as they are switched), weather, an outdoor circuit that suffers in rain, one load
 * that leaks at random while it runs, and now and then a surge.
 */
export function costSite({ days, intervalMs, loads: count, trips, statesMs, seed = 5 }: CostWish): Simulated {
  const random = draws(seed, 'cost')
  const loads = Array.from({ length: count }, (_, i): LoadPlan => {
    const load = drawAppliance(APPLIANCES[i % APPLIANCES.length]!, random)
    return { ...load, ref: `${load.ref}-${i + 1}`, monitored: i % 4 !== 3 }
  })
  const weeks = days / 7
  const place = Math.max(
    0,
    loads.findIndex(({ ref }) => ref.startsWith('oven')),
  )
  const hoursOn = Math.max(1, days * perDay(loads[place]!))
  // A third of the trips are surges, and so do not depend on the fault.
  const perHour = (0.75 * trips) / hoursOn
  loads[place] = {
    ...loads[place]!,
    monitored: true,
    fault: { kind: 'in-run', perHour, mA: 60, spread: 0.1, seconds: 4 },
  }
  const to = FROM + days * DAY
  const bare: Installation = {
    name: 'Village bakery',
    timeZone: 'Europe/Vienna',
    latitude: 47.3,
    longitude: 13.4,
    weather: { spellsPerWeek: 2.5, meanC: 9, swingC: 5 },
    rcds: [
      {
        ref: 'A',
        ratedMa: 30,
        tripMa: TRIP_MA,
        circuits: circuitsOf(loads),
        drift: { mA: 0.3, hours: 12 },
        flickerMa: 0.08,
        surgesPerWeek: trips / 3 / weeks,
      },
    ],
    isolating: [{ of: 'circuit:2', from: FROM + 2 * DAY, to: FROM + 3 * DAY, told: true }],
    sharedSurgesPerWeek: 0,
  }
  const installation = raisedTo(bare, 0.7 * TRIP_MA, FROM, FROM + Math.min(days, 14) * DAY, seed)
  const plan: Plan = {
    installation,
    people: PEOPLE,
    logger: loggerOf(intervalMs, statesMs ?? 60_000),
    from: FROM,
    to,
    seed,
    stepMs: intervalMs,
    truth: { rcd: 'A', kind: 'cost', causes: [`load:${loads[place]!.ref}`], answers: [`load:${loads[place]!.ref}`] },
  }
  return withCircuitChannels(plan)
}

const PEOPLE: People = {
  up: 5 * 60,
  down: 23 * 60,
  resetMinutes: 12,
  noticed: 0.8,
  lateSeconds: 30,
  suspects: ['load:mixer'],
}

function loggerOf(intervalMs: number, statesMs: number): Logger {
  return {
    intervalMs,
    resolutionMa: 0.01,
    accuracy: { percent: 2, digits: 5 },
    fullScaleMa: 300,
    gaps: [],
    clockMs: 0,
    clockMsPerDay: 0,
    statesMs,
    statesOnChange: true,
    loadCurrent: true,
    weather: true,
  }
}

/** Hours a day that a load is on, about. */
function perDay({ habit }: LoadPlan): number {
  return habit.kind === 'runs' ? (habit.perDay * habit.minutes) / 60 : 8
}

function circuitsOf(loads: readonly LoadPlan[]): CircuitPlan[] {
  return Array.from({ length: CIRCUITS }, (_, c) => ({
    ref: String(c + 1),
    isolation: 'single-pole' as const,
    standing: { g: 0.05, b: 0.4 },
    neutralShare: 0.1,
    loads: loads.filter((_, i) => i % CIRCUITS === c),
    ...(c === CIRCUITS - 1 ? { damp: OUTDOOR } : {}),
  }))
}

/** Simulates the plan with the channels of the circuits, and with the switchings of the loads that have no channel. */
function withCircuitChannels(plan: Plan): Simulated {
  const { circuits } = plan.installation.rcds[0]!
  const wet = wetness(weatherOf(plan), OUTDOOR, plan.from, plan.to)
  const most = Math.ceil((plan.to - plan.from) / plan.stepMs!) + 1
  const t = new Float64Array(most)
  const columns = circuits.map(() => new Float64Array(most))
  const random = draws(plan.seed, 'circuit channels')
  const listed = circuits.flatMap(({ loads }) => loads)
  const before = new Uint8Array(listed.length)
  const changes: { of: string; at: number; on: boolean }[] = []
  let n = 0
  const watch = (_: string, moment: Moment): void => {
    for (let k = 0; k < listed.length; k++) {
      if (moment.on[k] === before[k]) continue
      before[k] = moment.on[k]!
      if (!listed[k]!.monitored) {
        changes.push({ of: `load:${listed[k]!.ref}`, at: Math.round(moment.t), on: before[k] === 1 })
      }
    }
    if (!moment.whole) return
    t[n] = moment.t
    const damp = wet[Math.floor((moment.t - plan.from) / 60_000)] ?? 0
    let k = 0
    circuits.forEach((circuit, c) => {
      let g = circuit.standing.g + (circuit.damp ? damp * circuit.damp.mA : 0)
      let b = circuit.standing.b
      for (const load of circuit.loads) {
        const { g: more, b: beside } = moment.on[k++] === 1 ? load.on : load.idle
        g += more
        b += beside
      }
      const mA = moment.closed ? Math.sqrt(g * g + b * b) + random.normal(0, 0.02) : 0
      columns[c]![n] = Math.round(100 * Math.max(0, mA)) / 100
    })
    n++
  }
  const simulated = simulate({ ...plan, watch })
  const series = new Map(simulated.series)
  const times = t.slice(0, n)
  circuits.forEach(({ ref }, c) => {
    series.set(`leak-${ref}`, { t: times, v: columns[c]!.slice(0, n) })
  })
  const sheet = SiteSheet.parse({
    ...simulated.sheet,
    channels: [
      ...simulated.sheet.channels,
      ...circuits.map(({ ref }) => ({ ref: `leak-${ref}`, quantity: 'leakage', circuit: ref, resolutionMa: 0.01 })),
    ],
  })
  const switchings = [...simulated.switchings, ...changes].sort((a, b) => a.at - b.at)
  return { ...simulated, sheet, series, switchings }
}
