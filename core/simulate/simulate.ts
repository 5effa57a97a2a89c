import type { SiteTest, Timetable, Trip } from '../contract/records.ts'
import { localClock } from '../timeline/local-clock.ts'
import type { Series } from '../timeline/series.ts'
import { type Moment, runDevice, surgeTimes, type TrueTrip } from './device-run.ts'
import { draws } from './draws.ts'
import type { Installation, Logger, People } from './installation.ts'
import { keeperOf } from './people.ts'
import { recorderOf } from './recorder.ts'
import { ampsChannel, leakageChannel, sheetOf, stateChannel } from './sheet-of.ts'
import type { Simulated, Truth } from './simulated.ts'
import { type TrueLine, tallyOf } from './true-budget.ts'
import { drawWeather, type Weather } from './weather.ts'

const HOUR = 3_600_000

/** A span of an installation's life, who is there and what is recorded. */
export interface Plan {
  readonly installation: Installation
  readonly people: People
  /** Null: nothing but what people write down. */
  readonly logger: Logger | null
  readonly from: number
  readonly to: number
  readonly seed: number
  /** Step of the physics; by default the logger's interval, at least 1 s and at most 10 s. */
  readonly stepMs?: number
  readonly timetables?: readonly Timetable[]
  readonly tests?: readonly SiteTest[]
  readonly rampTripMa?: Readonly<Record<string, number>>
  readonly truth: Omit<Truth, 'trips' | 'budget'>
  /** Told every step of every device. */
  readonly watch?: (rcd: string, moment: Moment) => void
}

/** Simulates a plan. The same plan gives the same bytes. */
export function simulate(plan: Plan): Simulated {
  const { installation, logger, from, to, seed } = plan
  const clock = localClock(installation.timeZone)
  const weather = weatherOf(plan)
  const sharedSurges = surgeTimes(installation.sharedSurgesPerWeek, from, to, seed, 'shared')
  const series = new Map<string, Series>()
  const trips: Trip[] = []
  const truths: TrueTrip[] = []
  const budget = new Map<string, TrueLine>()
  for (const rcd of installation.rcds) {
    const keeper = keeperOf(plan.people, clock, draws(seed, `people ${rcd.ref}`))
    const channels = {
      leakage: leakageChannel(rcd.ref),
      loadCurrent: logger?.loadCurrent ? ampsChannel(rcd.ref) : null,
      states: rcd.circuits.flatMap((circuit) =>
        circuit.loads.map((load) => (load.listed && load.monitored ? stateChannel(load.ref) : null)),
      ),
    }
    const intervalMs = logger?.intervalOf?.[rcd.ref] ?? logger?.intervalMs ?? 10_000
    const stepMs = plan.stepMs ?? Math.min(10_000, Math.max(1_000, intervalMs))
    const recorder = logger && recorderOf({ ...logger, intervalMs }, channels, from, rcd.flickerMa, seed)
    const setting = { from, to, clock, latitude: installation.latitude, longitude: installation.longitude }
    // Without a logger there is no budget to compare with; whoever only counts trips is spared the account.
    const tally = logger === null ? undefined : tallyOf(rcd)
    const site = { installation, weather, setting, seed, stepMs, keeper, sharedSurges, ...(tally ? { tally } : {}) }
    const happened = runDevice(rcd, site, (moment) => {
      recorder?.take(moment)
      plan.watch?.(rcd.ref, moment)
    })
    for (const trip of happened) {
      trips.push(openAtEnd(keeper.note(rcd.ref, trip.at, trip.restoredAt, trip.lastClosed, trip.running), trip, to))
    }
    truths.push(...happened)
    for (const [of, line] of tally?.lines() ?? []) budget.set(of, line)
    for (const [ref, column] of recorder?.series() ?? []) series.set(ref, column)
  }
  if (logger?.weather) for (const [ref, column] of weatherSeries(weather, from, to)) series.set(ref, column)
  return {
    sheet: sheetOf(installation, logger, plan.rampTripMa),
    from,
    to,
    series,
    trips,
    switchings: switchingsOf(plan),
    timetables: plan.timetables ?? [],
    tests: plan.tests ?? [],
    remedies: [],
    truth: { ...plan.truth, trips: truths, budget },
  }
}

/** The weather of a plan: as given, or drawn. */
export function weatherOf(plan: Pick<Plan, 'installation' | 'from' | 'to' | 'seed'>): Weather {
  const { weather, longitude } = plan.installation
  if ('rain' in weather) return weather
  // Two days earlier, so that damp has a past. Coldest about four in the morning by the sun.
  return drawWeather(plan.from - 48 * HOUR, plan.to, weather, draws(plan.seed, 'weather'), 4 - longitude / 15)
}

/** A trip that is not over when the record ends has neither an end nor a last bound beyond it. */
function openAtEnd(noted: Trip, truth: TrueTrip, to: number): Trip {
  if (truth.restoredAt < to) return noted
  const { restoredAt: _, ...rest } = noted
  return rest.before !== undefined && rest.before > to ? { ...rest, before: to } : rest
}

function switchingsOf(plan: Plan): Simulated['switchings'] {
  return plan.installation.isolating
    .filter((cut) => cut.told)
    .flatMap(({ of, from, to }) => [
      { of, at: Math.round(from), on: false },
      ...(to < plan.to ? [{ of, at: Math.round(to), on: true }] : []),
    ])
    .sort((a, b) => a.at - b.at)
}

function weatherSeries(weather: Weather, from: number, to: number): Map<string, Series> {
  const first = Math.max(0, Math.ceil((from - weather.from) / HOUR))
  const last = Math.min(weather.rain.length, Math.floor((to - weather.from) / HOUR))
  // The reading stands at the end of its hour: "mm per interval" is what has fallen since the one before.
  const t = Float64Array.from({ length: Math.max(0, last - first) }, (_, i) => weather.from + (first + i + 1) * HOUR)
  const inside = t.findIndex((x) => x >= to)
  const n = inside === -1 ? t.length : inside
  const cut = (values: Float64Array): Series => {
    const series = { t: t.slice(0, n), v: values.slice(first, first + n) }
    const known = Array.from(series.v, (v, i) => (Number.isFinite(v) ? i : -1)).filter((i) => i >= 0)
    return known.length === n
      ? series
      : { t: Float64Array.from(known, (i) => series.t[i]!), v: Float64Array.from(known, (i) => series.v[i]!) }
  }
  return new Map([
    ['rain', cut(weather.rain)],
    ['outdoor', cut(weather.temperature)],
    ['rh', cut(weather.humidity)],
  ])
}
