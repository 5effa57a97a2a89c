import { type Series, usualInterval } from '../timeline/series.ts'
import { type Spans, spansOf } from '../timeline/spans.ts'
import { draws } from './draws.ts'
import type { Installation, LoadFault, LoadPlan, RcdPlan } from './installation.ts'
import { drawFault, neededMa } from './scenarios/culprit.ts'
import { type Ground, raisedTo, withRcd } from './scenarios/ground.ts'
import { tuned } from './scenarios/tune.ts'
import { stateChannel } from './sheet-of.ts'
import type { Simulated } from './simulated.ts'
import type { Weather } from './weather.ts'

/** A load as it was really measured: 1 where it ran, 0 where not, no reading where nobody knows. */
export interface RealLoad {
  readonly ref: string
  readonly label: string
  readonly running: Series
}

/** What was really measured at a place. */
export interface RealSite {
  readonly name: string
  readonly timeZone: string
  readonly latitude: number
  readonly longitude: number
  readonly from: number
  readonly to: number
  readonly loads: readonly RealLoad[]
  readonly weather: Weather
}

/** The cause that is laid over it. */
export type Planted =
  | { readonly by: 'load'; readonly ref: string; readonly fault: LoadFault['kind'] }
  | { readonly by: 'rain' }

/**
 * Lays leakage, an RCD and a planted cause over real loads and real weather. The loads run as they really did (but not while the device is
 * open); their channels have readings only where the real ones have. Two loads share a circuit; with rain planted, an outdoor
 * circuit joins them.
 */
export function overlay(site: RealSite, planted: Planted, seed: number): Simulated {
  const random = draws(seed, 'overlay')
  const cause = planted.by === 'rain' ? 'rain' : `load:${planted.ref}`
  const sound = groundOf(site, seed)
  const needed = neededMa(sound)
  const damping = { lagHours: random.between(1, 4), decayHours: random.between(5, 12), soakMm: random.between(2, 5) }
  const simulated = tuned(
    (strength) => ({
      ...sound,
      installation: withRcd(sound.installation, (rcd) => planIn(rcd, planted, strength * needed, damping, seed)),
      truth: { rcd: 'A', kind: `overlay ${cause}`, causes: [cause], answers: [cause] },
    }),
    6,
    14,
  )
  const series = new Map(simulated.series)
  for (const load of site.loads) {
    const channel = stateChannel(load.ref)
    const told = series.get(channel)
    if (told) series.set(channel, onlyWhereKnown(told, load.running))
  }
  return { ...simulated, series }
}

function planIn(
  rcd: RcdPlan,
  planted: Planted,
  mA: number,
  damping: { readonly lagHours: number; readonly decayHours: number; readonly soakMm: number },
  seed: number,
): RcdPlan {
  if (planted.by === 'rain') {
    const circuits = rcd.circuits.map((circuit, c) =>
      c === 0 ? { ...circuit, damp: { ...damping, mA: 1.3 * mA } } : circuit,
    )
    return { ...rcd, circuits }
  }
  const fault = drawFault(planted.fault, mA, seed)
  const circuits = rcd.circuits.map((circuit) => ({
    ...circuit,
    loads: circuit.loads.map((load) => (load.ref === planted.ref ? { ...load, fault } : load)),
  }))
  return { ...rcd, circuits }
}

function groundOf(site: RealSite, seed: number): Ground {
  const random = draws(seed, 'overlay ground')
  const loads = site.loads.map((load): LoadPlan => {
    return {
      ref: load.ref,
      label: load.label,
      habit: { kind: 'given', spans: runningSpans(load.running) },
      amps: random.between(0.5, 9),
      on: { g: random.between(0.05, 0.4), b: random.between(0.1, 1.6) },
      idle: { g: 0, b: random.between(0, 0.5) },
      resumes: true,
      listed: true,
      monitored: true,
    }
  })
  const pairs = [[], ...loads.flatMap((_, i) => (i % 2 === 0 ? [loads.slice(i, i + 2)] : []))]
  const tripMa = random.between(20, 27)
  const installation: Installation = {
    name: site.name,
    timeZone: site.timeZone,
    latitude: site.latitude,
    longitude: site.longitude,
    weather: site.weather,
    rcds: [
      {
        ref: 'A',
        ratedMa: 30,
        tripMa,
        circuits: pairs.map((pair, c) => ({
          ref: c === 0 ? 'outdoor' : String(c),
          isolation: 'single-pole' as const,
          standing: { g: 0.05, b: random.between(0.3, 1) },
          neutralShare: 0.1,
          loads: pair,
        })),
        drift: { mA: 0.3, hours: 10 },
        flickerMa: 0.08,
        surgesPerWeek: 0,
      },
    ],
    isolating: [],
    sharedSurgesPerWeek: 0,
  }
  return {
    installation: raisedTo(installation, random.between(0.6, 0.85) * tripMa, site.from, site.to, seed),
    people: { up: 390, down: 1380, resetMinutes: 15, noticed: 0.8, lateSeconds: 30, suspects: [] },
    logger: {
      intervalMs: 60_000,
      resolutionMa: 0.01,
      accuracy: { percent: 2, digits: 3 },
      fullScaleMa: 200,
      gaps: [],
      clockMs: 0,
      clockMsPerDay: 0,
      statesMs: 60_000,
      statesOnChange: true,
      loadCurrent: false,
      weather: true,
    },
    from: site.from,
    to: site.to,
    seed,
    tests: [{ kind: 'ramp', rcd: 'A', tripMa: Math.round(10 * tripMa) / 10, at: site.from - 86_400_000 }],
  }
}

/** When a real load ran: from each reading of 1 to the next reading, at most three usual intervals on. */
function runningSpans({ t, v }: Series): Spans {
  const most = 3 * usualInterval({ t, v })
  const pairs: [number, number][] = []
  for (let i = 0; i + 1 < t.length; i++) if (v[i] === 1) pairs.push([t[i]!, Math.min(t[i + 1]!, t[i]! + most)])
  return spansOf(pairs)
}

/** The told states without those that no real reading stands behind, within two usual intervals. */
function onlyWhereKnown(told: Series, real: Series): Series {
  const most = 2 * usualInterval(real)
  let k = 0
  const keep: number[] = []
  for (let i = 0; i < told.t.length; i++) {
    const t = told.t[i]!
    while (k + 1 < real.t.length && real.t[k + 1]! <= t) k++
    if (Math.abs(t - (real.t[k] ?? Number.POSITIVE_INFINITY)) <= most) keep.push(i)
  }
  return { t: Float64Array.from(keep, (i) => told.t[i]!), v: Float64Array.from(keep, (i) => told.v[i]!) }
}
