import type { Findings } from '../../../core/contract/findings.ts'
import { findings } from '../../../core/findings/findings.ts'
import { APPLIANCES, drawAppliance } from '../../../core/simulate/appliances.ts'
import { draws } from '../../../core/simulate/draws.ts'
import type { CircuitPlan, Installation, LoadFault } from '../../../core/simulate/installation.ts'
import { raisedTo } from '../../../core/simulate/scenarios/ground.ts'
import { simulate } from '../../../core/simulate/simulate.ts'
import { evidenceOf, type Simulated } from '../../../core/simulate/simulated.ts'
import type { Evidence } from '../../../core/timeline/evidence.ts'

export const DAY = 86_400_000
/** A Monday; the site's clock never changes to summer time. */
const FROM = Date.UTC(2026, 8, 21) - 5.5 * 3_600_000
const TRIP_MA = 23

const FAULTS: readonly (LoadFault | null)[] = [
  { kind: 'when-on', mA: 20, spread: 0.5 },
  { kind: 'in-run', perHour: 0.4, mA: 60, spread: 0.1, seconds: 5 },
  { kind: 'warming', mA: 26, spread: 0.3, riseMinutes: 4, dryMinutes: 20, dampHours: 3 },
  null,
]

/** Seeds of the sites that laws are tried on: one for each way to fail, and surges alone. */
export const LAW_SEEDS: readonly number[] = FAULTS.map((_, i) => i)

/**
 * A week of a small site at one reading a minute, with six loads on three circuits, one of them faulty (or none, and surges), an
 * isolation that was written down, rain and a ramp test. Without coordinates: the sun knows no law but its own.
 */
export function lawsSite(seed: number): Simulated {
  const random = draws(seed, 'laws')
  const loads = random
    .shuffle(APPLIANCES)
    .slice(0, 6)
    .map((name) => drawAppliance(name, random))
  const fault = FAULTS[seed % FAULTS.length]!
  const culprit = loads.findIndex(({ habit }) => habit.kind === 'runs')
  if (fault !== null) loads[culprit] = { ...loads[culprit]!, fault }
  const circuits = Array.from(
    { length: 3 },
    (_, c): CircuitPlan => ({
      ref: String(c + 1),
      label: `Way ${c + 1}`,
      isolation: c === 0 ? 'two-pole' : 'single-pole',
      standing: { g: 0.05, b: 0.5 },
      neutralShare: 0.1,
      loads: loads.slice(2 * c, 2 * c + 2),
    }),
  )
  const bare: Installation = {
    name: 'Village bakery',
    timeZone: 'Asia/Kolkata',
    latitude: 27,
    longitude: 77,
    weather: { spellsPerWeek: 3, meanC: 12, swingC: 5 },
    rcds: [
      {
        ref: 'A',
        ratedMa: 30,
        tripMa: TRIP_MA,
        circuits,
        drift: { mA: 0.2, hours: 9 },
        flickerMa: 0.05,
        surgesPerWeek: fault === null ? 9 : 1,
      },
    ],
    isolating: [{ of: 'circuit:2', from: FROM + 2.4 * DAY, to: FROM + 3.1 * DAY, told: true }],
    sharedSurgesPerWeek: 0,
  }
  const to = FROM + 7 * DAY
  const simulated = simulate({
    installation: raisedTo(bare, 0.75 * TRIP_MA, FROM, to, seed),
    people: {
      up: 360,
      down: 1_380,
      resetMinutes: 12,
      noticed: 0.8,
      lateSeconds: 20,
      suspects: [`load:${loads[0]!.ref}`],
    },
    logger: {
      intervalMs: 60_000,
      resolutionMa: 0.01,
      accuracy: { percent: 2, digits: 5 },
      fullScaleMa: 300,
      gaps: [],
      clockMs: 0,
      clockMsPerDay: 0,
      statesMs: 60_000,
      statesOnChange: true,
      loadCurrent: true,
      weather: true,
    },
    from: FROM,
    to,
    seed,
    stepMs: 10_000,
    tests: [{ kind: 'ramp', rcd: 'A', tripMa: TRIP_MA, at: FROM - DAY }],
    truth: { rcd: 'A', kind: 'laws', causes: [], answers: [] },
  })
  const { latitude: _, longitude: __, ...sheet } = simulated.sheet
  return { ...simulated, sheet }
}

/** Evidence and findings of a site, made once. */
export function madeSite(seed: number): { readonly evidence: Evidence; readonly found: Findings } {
  const before = made.get(seed)
  if (before !== undefined) return before
  const evidence = evidenceOf(lawsSite(seed))
  const site = { evidence, found: findings(evidence) }
  made.set(seed, site)
  return site
}

const made = new Map<number, { readonly evidence: Evidence; readonly found: Findings }>()

/** Evidence with every time of it moved. */
export function movedBy(evidence: Evidence, ms: number): Evidence {
  const move = <T extends object>(record: T): T =>
    Object.fromEntries(
      Object.entries(record).map(([key, value]) => [
        key,
        TIMES.has(key) && typeof value === 'number' ? value + ms : value,
      ]),
    ) as T
  return {
    ...evidence,
    from: evidence.from + ms,
    to: evidence.to + ms,
    series: new Map([...evidence.series].map(([ref, { t, v }]) => [ref, { t: t.map((at) => at + ms), v }])),
    trips: evidence.trips.map(move),
    switchings: evidence.switchings.map(move),
    timetables: evidence.timetables.map(move),
    tests: evidence.tests.map(move),
    remedies: evidence.remedies.map(move),
  }
}

const TIMES = new Set(['at', 'after', 'before', 'restoredAt', 'from', 'until'])
