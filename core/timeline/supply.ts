import { writeInstant } from '../contract/primitives.ts'
import type { Rcd } from '../contract/site-sheet.ts'
import { type DeadRun, deadRuns, type UsualLevel, usualLevel } from './dead-runs.ts'
import type { Evidence } from './evidence.ts'
import { edgesOf } from './exposure.ts'
import { type Fall, stays } from './falls.ts'
import { leakageOf } from './group-leakage.ts'
import { outagesOf } from './outages.ts'
import { exposureOfRunning, holdOf, stepsOf } from './running.ts'
import { gapLimit, lowerBound, type Series, sliceSeries, usualInterval } from './series.ts'
import { complement, NO_SPANS, type Spans, spansOf, union } from './spans.ts'
import type { TimelineTrip } from './timeline.ts'

/** Switching that somebody wrote down may be this far from the fall it explains, ms. */
const HAND_SLACK = 10 * 60_000
/** What two loggers see of one event may lie this far apart, ms. */
const LOGGER_SLACK = 60_000
/** A load explains falls when this part of its switching off falls to nothing. */
const HABIT = 0.8
/** A log that reads nothing for more of the time than this does not show single falls. */
const MOST_DEAD = 0.3
const DEFAULT_VOLTS = 230

/** What supply is told from. Series are cut to the span. */
export interface SupplyInput {
  readonly evidence: Evidence
  readonly rcd: Rcd
  readonly series: ReadonlyMap<string, Series>
  readonly leakage: Series | null
}

/** When there was supply behind the device. */
export interface Supply {
  readonly energised: Spans
  /** Written down and proposed, around the span too, by time. */
  readonly trips: readonly TimelineTrip[]
  /** The level without what was read after the clamp had come off. */
  readonly leakage: Series | null
  /** Energised time in which the leakage log nevertheless read nothing: the clamp was off. */
  readonly misread: Spans
  readonly notes: readonly string[]
}

/** Finds the time with the device closed and the supply there, from trips, voltage and the leakage log. */
export function supplyOf({ evidence, rcd, series, leakage }: SupplyInput): Supply {
  const { sheet, from, to } = evidence
  const notes: string[] = []
  const half = (sheet.supply?.volts ?? DEFAULT_VOLTS) / 2
  const voltage = voltageOf(evidence, rcd.ref, series)
  const level = leakage === null ? null : usualLevel(leakage)
  const running = runningOf(evidence, rcd, series)
  const runs = leakage === null || level === null ? [] : deadRuns(leakage, level)
  const written = evidence.trips.filter((trip) => trip.rcd === rcd.ref)

  const interval = usualInterval(leakage ?? voltage ?? NONE)
  const explains = switchingThatExplains(evidence, rcd, running, runs, interval)
  const falls: Fall[] = []
  const limit = leakage === null ? 0 : gapLimit(leakage) || 0
  for (const run of runs) falls.push({ ...run, log: 'leakage', seen: seen(run, limit), explained: explains(run) })
  if (voltage !== null) {
    const voltageLimit = gapLimit(voltage) || 0
    for (const run of deadRuns(voltage, { nothing: half, alive: half }))
      falls.push({ ...run, log: 'voltage', seen: seen(run, voltageLimit), explained: false })
  }
  falls.sort((a, b) => a.from - b.from || (a.log < b.log ? -1 : 1))

  const nextSign = (t: number, until: number): number =>
    Math.min(
      firstAtLeast(leakage, level?.alive ?? Number.POSITIVE_INFINITY, t, until),
      firstAtLeast(voltage, half, t, until),
      ...running.map((s) => firstAtLeast(s, 0.5, t, until)),
    )
  const supplied = memo((fall: Fall): boolean => {
    const after = fall.from + LOGGER_SLACK
    const until = (fall.back ?? to) - Math.max(LOGGER_SLACK, 2 * (interval || 0))
    return (
      firstAtLeast(voltage, half, after, until) < until ||
      running.some((s) => firstAtLeast(s, 0.5, after, until) < until) ||
      // What trips was closed. A trip written down within an outage that ends is rather one found late.
      (fall.back === null && written.some((t) => (t.at ?? t.after ?? 0) > fall.from + HAND_SLACK))
    )
  })
  const deadMs = runs.reduce((sum, run) => sum + ((run.back ?? run.lastDead) - run.from), 0)
  const telling = level !== null && !level.mostlyNothing && deadMs <= MOST_DEAD * (to - from)
  const gone = (fall: Fall): boolean =>
    fall.log === 'leakage' && telling && !fall.explained && stays(fall) && (fall.before === null || fall.sharp)
  const elsewhere = fallsElsewhere(evidence, rcd, series)
  const shared: number[] = []
  const outages = outagesOf({
    rcd: rcd.ref,
    from,
    to,
    trips: written,
    falls,
    running,
    nextSign,
    silentSince: (after, t) => silentSince(leakage, level, limit, after, t),
    deadBy: (after, t) => deadBy(leakage, runs, after, t),
    dead: (fall) => gone(fall) && !supplied(fall),
    proposable: (fall) => {
      if (!gone(fall) || fall.lastLive === null || !fall.seen || fall.back === null || supplied(fall)) return false
      if (!elsewhere(fall.from)) return true
      shared.push(fall.from)
      return false
    },
  })
  notes.push(...outages.notes)
  if (shared.length > 0)
    notes.push(
      `Several devices lose their supply together at ${shared.slice(0, 3).map(writeInstant).join(', ')}: taken as an outage of the supply, not as trips.`,
    )

  const misread = falls.filter((fall) => gone(fall) && supplied(fall) && !outages.taken.has(fall))
  const tail = misread.find((fall) => fall.back === null)
  if (misread.length > 0)
    notes.push(
      `The leakage log reads about nothing from ${writeInstant(misread[0]!.from)} although there was supply: the clamp was off, these readings are set aside.`,
    )
  const noVolts =
    voltage === null ? NO_SPANS : stepsOf(voltage, { high: half, low: half, ...holdOf(usualInterval(voltage)) }).off
  return {
    energised: complement(union(outages.spans, noVolts), from, to),
    trips: outages.trips,
    leakage: leakage !== null && tail !== undefined ? sliceSeries(leakage, from, tail.from) : leakage,
    misread: spansOf(misread.map((fall) => [fall.from, fall.back ?? to] as const)),
    notes,
  }
}

const NONE: Series = { t: new Float64Array(0), v: new Float64Array(0) }

function seen(run: DeadRun, limit: number): boolean {
  return run.lastLive !== null && run.from - run.lastLive <= limit
}

function voltageOf({ sheet }: Evidence, rcd: string, series: ReadonlyMap<string, Series>): Series | null {
  for (const c of sheet.channels) {
    if (c.quantity === 'voltage' && c.rcd === rcd && series.has(c.ref)) return series.get(c.ref)!
  }
  return null
}

/** Running channels of the device's loads. */
function runningOf({ sheet }: Evidence, rcd: Rcd, series: ReadonlyMap<string, Series>): Series[] {
  const loads = new Set(rcd.circuits.flatMap((c) => c.loads.map((load) => load.ref)))
  return sheet.channels
    .filter((c) => c.quantity === 'running' && c.load !== undefined && loads.has(c.load) && series.has(c.ref))
    .map((c) => series.get(c.ref)!)
}

/**
 * Whether switching explains a fall: somebody wrote that a circuit or load of the device was switched off about then,
 * or one load alone stops at that moment and nearly always takes the level to nothing when it stops.
 */
function switchingThatExplains(
  { switchings }: Evidence,
  rcd: Rcd,
  running: readonly Series[],
  runs: readonly DeadRun[],
  interval: number,
): (run: DeadRun) => boolean {
  const things = new Set(
    rcd.circuits.flatMap((c) => [`circuit:${c.ref}`, ...c.loads.map((load) => `load:${load.ref}`)]),
  )
  // the same state written down again is no switching
  const last = new Map<string, boolean>()
  const byHand = [...switchings]
    .sort((a, b) => a.at - b.at)
    .filter(({ of, on }) => {
      const changed = last.get(of) !== on
      last.set(of, on)
      return changed && !on && things.has(of)
    })
    .map(({ at }) => at)
  const slack = Math.max(LOGGER_SLACK, 2 * (interval || 0))
  const candidates = runs.filter((run) => run.lastLive !== null && stays(run))
  if (candidates.length === 0) return () => false
  const begins = Float64Array.from(candidates, (run) => run.from)
  const stops = running.map((s) =>
    Float64Array.from(
      edgesOf(exposureOfRunning(s)).filter((e) => !e.on),
      (e) => e.at,
    ),
  )
  const habitual = stops.map((times) => {
    const hits = times.filter((t) => near(begins, t, slack)).length
    return times.length >= 2 && hits >= HABIT * times.length
  })
  return (run) => {
    if (run.lastLive === null) return false
    if (byHand.some((at) => at >= run.lastLive! - HAND_SLACK && at <= run.from + HAND_SLACK)) return true
    const stopping = stops.flatMap((times, i) => (near(times, run.from, slack) ? [i] : []))
    return stopping.length === 1 && habitual[stopping[0]!]!
  }
}

/** Whether another device of the site loses its level or its voltage about then. */
function fallsElsewhere(evidence: Evidence, rcd: Rcd, series: ReadonlyMap<string, Series>): (t: number) => boolean {
  let begins: Float64Array | null = null
  return (t) => {
    begins ??= Float64Array.from(
      evidence.sheet.rcds
        .filter((other) => other.ref !== rcd.ref)
        .flatMap((other) => {
          const { level } = leakageOf(
            evidence.sheet.channels.filter((c) => c.rcd === other.ref),
            series,
          )
          const usual = level === null ? null : usualLevel(level)
          const volts = voltageOf(evidence, other.ref, series)
          const half = (evidence.sheet.supply?.volts ?? DEFAULT_VOLTS) / 2
          return [
            ...(level === null || usual === null || usual.mostlyNothing ? [] : deadRuns(level, usual)),
            ...(volts === null ? [] : deadRuns(volts, { nothing: half, alive: half })),
          ].filter((run) => run.sharp && stays(run))
        })
        .map((run) => run.from),
    ).sort()
    return near(begins, t, LOGGER_SLACK)
  }
}

/**
 * Last level in (after, t] when the log is silent or dead from there past `t`; null when it goes on reading a level,
 * or tells nothing.
 */
function silentSince(
  leakage: Series | null,
  level: UsualLevel | null,
  limit: number,
  after: number,
  t: number,
): number | null {
  if (leakage === null || level === null) return null
  let i = lowerBound(leakage.t, t + 1) - 1
  while (i >= 0 && leakage.t[i]! > after && leakage.v[i]! < level.alive) i--
  if (i < 0 || leakage.t[i]! <= after) return null
  const next = i + 1
  const goesOn = next < leakage.t.length && leakage.t[next]! - leakage.t[i]! <= limit && leakage.v[next]! >= level.alive
  return goesOn ? null : leakage.t[i]!
}

/** First reading after `after` when it lies in a stretch of nothing that goes on up to about `t`; else null. */
function deadBy(leakage: Series | null, runs: readonly DeadRun[], after: number, t: number): number | null {
  if (leakage === null) return null
  const run = runs.find(
    (r) => stays(r) && r.from <= after && (r.back === null || r.back > t - HAND_SLACK) && r.lastDead > after,
  )
  const i = lowerBound(leakage.t, after + 1)
  return run === undefined || i >= leakage.t.length || leakage.t[i]! >= t ? null : leakage.t[i]!
}

function firstAtLeast(series: Series | null, value: number, from: number, until: number): number {
  if (series === null) return Number.POSITIVE_INFINITY
  const { t, v } = series
  for (let i = lowerBound(t, from); i < t.length && t[i]! < until; i++) {
    if (v[i]! >= value) return t[i]!
  }
  return Number.POSITIVE_INFINITY
}

/** Whether one of the sorted times lies within `slack` of t. */
function near(times: Float64Array, t: number, slack: number): boolean {
  const i = lowerBound(times, t - slack)
  return i < times.length && times[i]! <= t + slack
}

function memo<K extends object, V>(compute: (key: K) => V): (key: K) => V {
  const known = new WeakMap<K, { readonly value: V }>()
  return (key) => {
    let found = known.get(key)
    if (found === undefined) {
      found = { value: compute(key) }
      known.set(key, found)
    }
    return found.value
  }
}
