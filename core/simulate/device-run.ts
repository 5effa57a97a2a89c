import { draws } from './draws.ts'
import type { Setting } from './habit.ts'
import { runsOf } from './habit.ts'
import type { Installation, RcdPlan } from './installation.ts'
import { type LoadState, loadState } from './load-state.ts'
import type { Keeper } from './people.ts'
import type { Tally } from './true-budget.ts'
import { type Weather, wetness } from './weather.ts'

const MINUTE = 60_000
const WEEK = 7 * 86_400_000

/** The group at one instant; the same object each time, so copy what is kept. */
export interface Moment {
  t: number
  /** At the end of a step; else between two, when only states changed. */
  whole: boolean
  closed: boolean
  /** The group's leakage, mA; 0 while open. */
  g: number
  b: number
  /** The group's load current, A. */
  amps: number
  /** 1 for each load that runs, in the order of `loadsOf`. */
  readonly on: Uint8Array
}

/** What really happened at a trip. */
export interface TrueTrip {
  readonly rcd: string
  readonly at: number
  readonly restoredAt: number
  /** When the device was closed before; the start when it never opened. */
  readonly lastClosed: number
  readonly by: 'leakage' | 'surge' | 'shared'
  /** Residual current that opened it, or that stood while a surge did, mA. */
  readonly mA: number
  /** Conductive mA of each fault at that moment: `load:REF`, `rain`, `load-current`. */
  readonly faults: Readonly<Record<string, number>>
  readonly running: readonly string[]
}

/** References of a device's loads in the order of its circuits. */
export function loadsOf(rcd: RcdPlan): string[] {
  return rcd.circuits.flatMap((circuit) => circuit.loads.map((load) => load.ref))
}

/** What one device's run needs beside the device. */
export interface RunSite {
  readonly installation: Installation
  readonly weather: Weather
  readonly setting: Setting
  readonly seed: number
  readonly stepMs: number
  readonly keeper: Keeper
  /** Instants of transients that reach every device. */
  readonly sharedSurges: readonly number[]
  /** Keeps account of what each circuit and load adds. */
  readonly tally?: Tally
}

/**
 * Lets one device live through the setting's span in steps of `stepMs`, telling each step's end to `watch`. It opens when
 * the magnitude of the phasor sum of all that leaks, with the flicker within the step, reaches its trip current, and stays open until the
 * keeper closes it. Nothing flows while it is open.
 */
export function runDevice(rcd: RcdPlan, site: RunSite, watch: (moment: Moment) => void): TrueTrip[] {
  const { setting, stepMs: dt, seed } = site
  const { from, to } = setting
  const loads = rcd.circuits.flatMap((circuit, c) => circuit.loads.map((plan) => actorOf(plan, c, site)))
  const circuits = rcd.circuits.map((plan) => ({
    plan,
    shut: cutsOf(`circuit:${plan.ref}`, site.installation),
    stays: plan.isolation === 'two-pole' ? 0 : plan.neutralShare,
    wet: plan.damp ? wetness(site.weather, plan.damp, from, to) : null,
    off: false,
  }))
  const drift = wander(rcd, from, to, seed)
  const flicker = draws(seed, `flicker ${rcd.ref}`)
  const surges = surgesOf(rcd, site)
  const moment: Moment = { t: from, whole: true, closed: true, g: 0, b: 0, amps: 0, on: new Uint8Array(loads.length) }
  const trips: TrueTrip[] = []
  let opensUntil = Number.NEGATIVE_INFINITY
  let lastClosed = from
  let streak = 0
  let surge = 0

  for (let t = from; t < to; t += dt) {
    const closed = t >= opensUntil
    if (closed && !moment.closed) lastClosed = opensUntil
    const minute = Math.floor((t - from) / MINUTE)
    let g = 0
    let b = closed ? drift[minute]! : 0
    let amps = 0
    let brief = 0
    for (const circuit of circuits) {
      circuit.off = within(circuit.shut, t)
      if (!closed) continue
      const left = circuit.off ? circuit.stays : 1
      g += left * (circuit.plan.standing.g + (circuit.wet ? circuit.wet[minute]! * circuit.plan.damp!.mA : 0))
      b += left * circuit.plan.standing.b
    }
    for (let k = 0; k < loads.length; k++) {
      const load = loads[k]!
      const circuit = circuits[load.circuit]!
      const plugged = closed && !within(load.unplugged, t)
      const running = load.wants(t, dt, plugged && !circuit.off)
      // What a load's filter leaks goes with the line; the neutral stands near earth.
      load.state.step(t, dt, plugged && !circuit.off, running)
      moment.on[k] = running ? 1 : 0
      if (!closed) continue
      g += load.state.g
      b += load.state.b
      brief += load.state.pulse
      if (running) amps += load.plan.amps
    }
    if (closed && rcd.neutralEarth) g += rcd.neutralEarth * amps
    Object.assign(moment, { t, closed, g, b, amps })
    if (closed && site.tally) tell(site.tally, rcd, circuits, loads, minute, moment)

    let peak = Math.sqrt((g + brief) ** 2 + b * b)
    let by: TrueTrip['by'] | null = null
    if (closed && peak > rcd.tripMa - 6 * rcd.flickerMa) {
      let most = 0
      for (let second = 0; second < dt; second += 1_000) most = Math.max(most, flicker.normal())
      peak += most * rcd.flickerMa
      if (peak >= rcd.tripMa) by = 'leakage'
    }
    while (surge < surges.length && surges[surge]!.at <= t) {
      if (closed && by === null) by = surges[surge]!.by
      surge++
    }
    if (by !== null && t > from) {
      const at = Math.round(Math.max(lastClosed + 40, t - flicker.uniform() * (dt - 50)))
      streak = at - lastClosed < 10 * MINUTE && trips.length > 0 ? streak + 1 : 0
      const running = loads.filter((_, k) => moment.on[k] === 1).map((load) => `load:${load.plan.ref}`)
      opensUntil = Math.max(at + dt, site.keeper.restoredAt(at, streak))
      trips.push({
        rcd: rcd.ref,
        at,
        restoredAt: opensUntil,
        lastClosed,
        by,
        mA: peak,
        faults: faultsNow(rcd, loads, circuits, minute, amps),
        running,
      })
      // What switched on within this step ran, if only for a moment: states are told as they change.
      moment.t = at - 20
      moment.whole = false
      watch(moment)
      moment.on.fill(0)
      for (const load of loads) load.interrupt()
      Object.assign(moment, { t: at, closed: false, g: 0, b: 0, amps: 0 })
      watch(moment)
      moment.t = t
      moment.whole = true
    }
    watch(moment)
  }
  return trips
}

interface Actor {
  readonly plan: RcdPlan['circuits'][number]['loads'][number]
  readonly circuit: number
  readonly state: LoadState
  readonly unplugged: readonly (readonly [number, number])[]
  /** Whether it runs at `t`, given supply; to be asked in order of time. */
  wants(t: number, dt: number, supplied: boolean): boolean
  /** The supply went. */
  interrupt(): void
}

function actorOf(plan: Actor['plan'], circuit: number, site: RunSite): Actor {
  const { seed, setting } = site
  const runs = runsOf(plan.habit, setting, draws(seed, `habit ${plan.ref}`))
  const countsSupply = plan.habit.kind === 'every'
  let at = 0
  let lost = 0
  let over = -1
  return {
    plan,
    circuit,
    state: loadState(plan, draws(seed, `fault ${plan.ref}`)),
    unplugged: cutsOf(`load:${plan.ref}`, site.installation),
    wants(t, dt, supplied) {
      if (!supplied && countsSupply) lost += dt
      const own = t - lost
      while (at < runs.length && own >= runs[at + 1]!) at += 2
      const wanted = at < runs.length && own >= runs[at]!
      if (wanted && !supplied && !plan.resumes) over = at
      return wanted && supplied && over !== at
    },
    interrupt() {
      if (!plan.resumes) over = at
    },
  }
}

/** What the switching of each thing would take away now. */
function tell(
  tally: Tally,
  rcd: RcdPlan,
  circuits: readonly {
    readonly plan: RcdPlan['circuits'][number]
    readonly wet: Float64Array | null
    readonly stays: number
    readonly off: boolean
  }[],
  loads: readonly Actor[],
  minute: number,
  moment: Moment,
): void {
  const { g, b, on } = tally
  circuits.forEach(({ plan, wet, stays, off }, c) => {
    g[c] = (1 - stays) * (plan.standing.g + (wet ? wet[minute]! * plan.damp!.mA : 0))
    b[c] = (1 - stays) * plan.standing.b
    on[c] = off ? 0 : 1
  })
  loads.forEach(({ plan, circuit, state }, l) => {
    const k = circuits.length + l
    const running = moment.on[l] === 1
    const shared = running ? (rcd.neutralEarth ?? 0) * plan.amps : 0
    on[k] = running ? 1 : 0
    g[k] = state.g + shared - plan.idle.g
    b[k] = state.b - plan.idle.b
    g[circuit]! += state.g + shared
    b[circuit]! += state.b
  })
  tally.step(moment.g, moment.b)
}

function faultsNow(
  rcd: RcdPlan,
  loads: readonly Actor[],
  circuits: readonly { readonly plan: RcdPlan['circuits'][number]; readonly wet: Float64Array | null }[],
  minute: number,
  amps: number,
): Record<string, number> {
  const found: Record<string, number> = {}
  for (const { plan, state } of loads) {
    const mA = state.fault + state.pulse
    if (mA > 0) found[`load:${plan.ref}`] = mA
  }
  const rain = circuits.reduce((sum, { plan, wet }) => sum + (wet ? wet[minute]! * plan.damp!.mA : 0), 0)
  if (rain > 0) found.rain = rain
  if (rcd.neutralEarth) found['load-current'] = rcd.neutralEarth * amps
  return found
}

function cutsOf(of: string, installation: Installation): (readonly [number, number])[] {
  return installation.isolating.filter((cut) => cut.of === of).map((cut) => [cut.from, cut.to] as const)
}

function within(pairs: readonly (readonly [number, number])[], t: number): boolean {
  for (const [a, b] of pairs) if (t >= a && t < b) return true
  return false
}

/** Slow wandering, each minute: an Ornstein–Uhlenbeck process (1930). */
function wander(rcd: RcdPlan, from: number, to: number, seed: number): Float64Array {
  const random = draws(seed, `drift ${rcd.ref}`)
  const out = new Float64Array(Math.ceil((to - from) / MINUTE) + 1)
  const keep = Math.exp(-1 / (60 * rcd.drift.hours))
  const kick = rcd.drift.mA * Math.sqrt(1 - keep * keep)
  let level = random.normal(0, rcd.drift.mA)
  for (let m = 0; m < out.length; m++) {
    out[m] = level
    level = keep * level + kick * random.normal()
  }
  return out
}

function surgesOf(rcd: RcdPlan, site: RunSite): { readonly at: number; readonly by: 'surge' | 'shared' }[] {
  const own = surgeTimes(rcd.surgesPerWeek, site.setting.from, site.setting.to, site.seed, rcd.ref)
  return [
    ...own.map((at) => ({ at, by: 'surge' as const })),
    ...site.sharedSurges.map((at) => ({ at, by: 'shared' as const })),
  ].sort((a, b) => a.at - b.at)
}

/** Instants of a Poisson process with this mean a week. */
export function surgeTimes(perWeek: number, from: number, to: number, seed: number, name: string): number[] {
  const out: number[] = []
  if (perWeek <= 0) return out
  const random = draws(seed, `surges ${name}`)
  for (let t = from + random.exponential(WEEK / perWeek); t < to; t += random.exponential(WEEK / perWeek)) out.push(t)
  return out
}
