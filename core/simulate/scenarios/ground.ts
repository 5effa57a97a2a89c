import type { SiteTest } from '../../contract/records.ts'
import { localClock } from '../../timeline/local-clock.ts'
import { APPLIANCES, drawAppliance } from '../appliances.ts'
import { runDevice } from '../device-run.ts'
import { type Draws, draws } from '../draws.ts'
import type { CircuitPlan, Installation, LoadPlan, Logger, People, RcdPlan } from '../installation.ts'
import { keeperOf } from '../people.ts'
import { magnitude, type Phasor } from '../phasor.ts'
import { type Plan, weatherOf } from '../simulate.ts'

const HOUR = 3_600_000
const DAY = 24 * HOUR

/** A sound site before anything is wrong with it: what every kind of scenario starts from. */
export type Ground = Omit<Plan, 'truth'>

/** What a kind wants of its ground; all the rest is drawn. */
export interface GroundWish {
  readonly days: number
  readonly loads?: readonly [number, number]
  readonly intervalMs?: number
  /** Greatest level that nothing wrong reaches, as a share of the trip current. */
  readonly reach?: readonly [number, number]
  /** Trip current as a share of the rating. */
  readonly tripShare?: readonly [number, number]
  readonly spellsPerWeek?: number
  /** Probability that somebody switches a circuit off for a day for no good reason. */
  readonly idleSwitching?: number
}

const PLACES: readonly (readonly [string, number, number])[] = [
  ['Europe/Vienna', 47.3, 13.4],
  ['Europe/London', 52.2, -1.5],
  ['America/Chicago', 41.6, -93.6],
  ['Australia/Sydney', -33.4, 149.6],
]

/**
 * Draws a sound site of one device: six to eleven ordinary loads on three to five circuits, weather, people, a logger. Standing leakage is
 * set so that without a fault the residual stays below the trip current, with the room that `reach` says.
 */
export function drawGround(seed: number, wish: GroundWish): Ground {
  const random = draws(seed, 'ground')
  const [timeZone, latitude, longitude] = random.pick(PLACES)
  const from = Date.UTC(2026, random.integer(12), 1 + random.integer(28)) + random.integer(24) * HOUR
  const to = from + wish.days * DAY
  const [fewest, most] = wish.loads ?? [6, 11]
  const names = random.shuffle(APPLIANCES).slice(0, fewest + random.integer(most - fewest + 1))
  const loads = names.map((name) => ({ ...drawAppliance(name, random), monitored: random.chance(0.85) }))
  const circuits = spread(loads, 3 + random.integer(3), random)
  const [leastShare, mostShare] = wish.tripShare ?? [0.62, 0.92]
  const rcd: RcdPlan = {
    ref: 'A',
    ratedMa: 30,
    tripMa: 30 * random.between(leastShare, mostShare),
    circuits,
    drift: { mA: random.between(0.1, 0.5), hours: random.between(4, 24) },
    flickerMa: random.between(0.03, 0.15),
    surgesPerWeek: 0,
  }
  const bare: Installation = {
    name: 'Site',
    timeZone,
    latitude,
    longitude,
    weather: { spellsPerWeek: wish.spellsPerWeek ?? random.between(1, 4), meanC: random.between(2, 18), swingC: 5 },
    rcds: [rcd],
    isolating: idleSwitching(circuits, from, to, wish.idleSwitching ?? 0.5, random),
    sharedSurgesPerWeek: 0,
  }
  const reach = random.between(...(wish.reach ?? [0.55, 0.88])) * rcd.tripMa
  const installation = raisedTo(bare, reach, from, to, seed)
  return {
    installation,
    people: drawPeople(loads, random),
    logger: drawLogger(wish.intervalMs ?? (random.chance(0.6) ? 10_000 : 60_000), random),
    from,
    to,
    seed,
    ...rampTest(rcd.tripMa, from, random),
  }
}

/** Loads dealt out over circuits `1`, `2`, …, none of them empty. */
function spread(loads: readonly LoadPlan[], count: number, random: Draws): CircuitPlan[] {
  const n = Math.min(count, loads.length)
  const of = loads.map((_, i) => (i < n ? i : random.integer(n)))
  return Array.from({ length: n }, (_, c) => ({
    ref: String(c + 1),
    isolation: random.chance(0.7) ? ('single-pole' as const) : ('two-pole' as const),
    standing: { g: random.between(0.02, 0.15), b: random.between(0.2, 0.9) },
    neutralShare: random.between(0.05, 0.2),
    loads: loads.filter((_, i) => of[i] === c),
  }))
}

function idleSwitching(
  circuits: readonly CircuitPlan[],
  from: number,
  to: number,
  probability: number,
  random: Draws,
): Installation['isolating'] {
  if (!random.chance(probability)) return []
  const start = from + random.between(0.1, 0.8) * (to - from)
  const end = Math.min(to, start + random.between(0.5, 2) * DAY)
  return [{ of: `circuit:${random.pick(circuits).ref}`, from: start, to: end, told: true }]
}

function drawPeople(loads: readonly LoadPlan[], random: Draws): People {
  return {
    up: random.between(5.5, 7.5) * 60,
    down: random.between(21.5, 23.7) * 60,
    resetMinutes: random.between(5, 40),
    noticed: random.between(0.55, 0.95),
    lateSeconds: random.between(0, 60),
    suspects: [`load:${random.pick(loads).ref}`],
  }
}

function drawLogger(intervalMs: number, random: Draws): Logger {
  return {
    intervalMs,
    resolutionMa: random.chance(0.7) ? 0.01 : 0.1,
    accuracy: { percent: random.between(0.5, 3), digits: 2 + random.integer(4) },
    fullScaleMa: 200,
    gaps: [],
    clockMs: 0,
    clockMsPerDay: 0,
    statesMs: 60_000,
    statesOnChange: true,
    loadCurrent: random.chance(0.4),
    weather: random.chance(0.7),
  }
}

function rampTest(tripMa: number, from: number, random: Draws): Pick<Plan, 'tests'> {
  if (!random.chance(0.7)) return {}
  const read = Math.round(10 * tripMa * random.normal(1, 0.02)) / 10
  const tests: SiteTest[] = [
    { kind: 'ramp', rcd: 'A', tripMa: read, at: from - Math.round(random.between(1, 48) * HOUR) },
  ]
  return { tests }
}

/** The installation with as much more capacitive standing leakage as lifts its greatest sound level to `mA`, or all leakage less. */
export function raisedTo(installation: Installation, mA: number, from: number, to: number, seed: number): Installation {
  const { greatest } = soundLevels({ installation, from, to, seed })
  const less = Math.min(1, mA / magnitude(greatest))
  const extra = Math.sqrt(Math.max(0, mA * mA - (less * greatest.g) ** 2)) - less * greatest.b
  const scaled = (phasor: Phasor): Phasor => ({ g: less * phasor.g, b: less * phasor.b })
  return withRcd(installation, (rcd) => ({
    ...rcd,
    circuits: rcd.circuits.map((circuit) => ({
      ...circuit,
      standing: { g: less * circuit.standing.g, b: less * circuit.standing.b + extra / rcd.circuits.length },
      loads: circuit.loads.map((load) => ({ ...load, on: scaled(load.on), idle: scaled(load.idle) })),
    })),
  }))
}

/** Levels of a site whose device never opens, seen once a minute: the greatest by magnitude, and the median. */
export function soundLevels(ground: Pick<Plan, 'installation' | 'from' | 'to' | 'seed'>): {
  readonly greatest: { readonly g: number; readonly b: number }
  readonly median: { readonly g: number; readonly b: number }
} {
  const { installation, from, to, seed } = ground
  const clock = localClock(installation.timeZone)
  const setting = { from, to, clock, latitude: installation.latitude, longitude: installation.longitude }
  const keeper = keeperOf(
    { up: 0, down: 1440, resetMinutes: 1, noticed: 1, lateSeconds: 0, suspects: [] },
    clock,
    draws(seed, 'nobody'),
  )
  const site = { installation, weather: weatherOf(ground), setting, seed, stepMs: 60_000, keeper, sharedSurges: [] }
  let greatest = { g: 0, b: 0 }
  const seen: { g: number; b: number }[] = []
  runDevice({ ...installation.rcds[0]!, tripMa: Number.POSITIVE_INFINITY, surgesPerWeek: 0 }, site, (moment) => {
    if (magnitude(moment) > magnitude(greatest)) greatest = { g: moment.g, b: moment.b }
    seen.push({ g: moment.g, b: moment.b })
  })
  seen.sort((a, b) => magnitude(a) - magnitude(b))
  return { greatest, median: seen[seen.length >> 1] ?? { g: 0, b: 0 } }
}

/** The installation with its first device changed. */
export function withRcd(installation: Installation, change: (rcd: RcdPlan) => RcdPlan): Installation {
  const [first, ...others] = installation.rcds
  return { ...installation, rcds: [change(first!), ...others] }
}

/** The installation with one more load on a circuit (by position), or the load of that name replaced. */
export function withLoad(installation: Installation, load: LoadPlan, circuit: number): Installation {
  return withRcd(installation, (rcd) => ({
    ...rcd,
    circuits: rcd.circuits.map((plan, c) => {
      const others = plan.loads.filter(({ ref }) => ref !== load.ref)
      return c === circuit % rcd.circuits.length ? { ...plan, loads: [...others, load] } : { ...plan, loads: others }
    }),
  }))
}

/** The installation with so many times the capacitive standing leakage on every circuit. */
export function withStanding(installation: Installation, times: number): Installation {
  return withRcd(installation, (rcd) => ({
    ...rcd,
    circuits: rcd.circuits.map((circuit) => ({
      ...circuit,
      standing: { g: circuit.standing.g, b: circuit.standing.b * times },
    })),
  }))
}
