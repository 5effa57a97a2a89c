import { type DeadRun, deadRuns, usualLevel } from './dead-runs.ts'
import type { Evidence } from './evidence.ts'
import { INSTANT_WITHIN, stays } from './falls.ts'
import { leakageOf } from './group-leakage.ts'
import { gapLimit, type Series } from './series.ts'
import type { TimelineTrip } from './timeline.ts'

/** A written trip, or a switching by hand, explains a fall so near, ms. */
const EXPLAINS_MS = 10 * 60_000
const DEFAULT_VOLTS = 230
const DAY_MS = 86_400_000
/** A level that falls to nothing oftener is that of a load that comes and goes, not of a device that opens. */
const MOST_A_DAY = 0.5
const FEW = 3

/**
 * Falls to nothing in the logs of the site's other devices that nobody wrote down as a trip: one that comes with a trip of the device asked
 * about tells a shared one. Sharp falls that stay and come back, in leakage or voltage; none that a written trip or switching by hand
 * explains. Linear in the readings of those devices.
 */
export function otherFalls(evidence: Evidence, rcd: string, series: ReadonlyMap<string, Series>): TimelineTrip[] {
  const { sheet } = evidence
  const found: TimelineTrip[] = []
  for (const other of sheet.rcds) {
    if (other.ref === rcd) continue
    const channels = sheet.channels.filter((c) => c.rcd === other.ref)
    const { level } = leakageOf(channels, series)
    const voltage = channels.find((c) => c.quantity === 'voltage' && series.has(c.ref))
    const days = (evidence.to - evidence.from) / DAY_MS
    const byLevel = leakageFalls(level)
    const isHabit = byLevel.length > Math.max(FEW, MOST_A_DAY * days)
    const falls = [
      ...(isHabit ? [] : byLevel),
      ...voltageFalls(voltage && series.get(voltage.ref), sheet.supply?.volts),
    ]
    const things = new Set(
      other.circuits.flatMap((c) => [`circuit:${c.ref}`, ...c.loads.map((load) => `load:${load.ref}`)]),
    )
    const explained = (t: number): boolean =>
      evidence.switchings.some((s) => !s.on && things.has(s.of) && Math.abs(s.at - t) <= EXPLAINS_MS) ||
      evidence.trips.some(
        (trip) =>
          trip.rcd === other.ref &&
          t >= (trip.at ?? trip.after ?? 0) - EXPLAINS_MS &&
          t <= Math.max(trip.at ?? trip.before ?? 0, trip.restoredAt ?? 0) + EXPLAINS_MS,
      )
    for (const fall of falls) {
      if (explained(fall.from) || found.some((f) => f.rcd === other.ref && Math.abs(f.to - fall.from) <= EXPLAINS_MS))
        continue
      const from = fall.from - fall.lastLive! <= INSTANT_WITHIN ? fall.from : fall.lastLive!
      found.push({ id: null, rcd: other.ref, from, to: fall.from, narrowed: false, restoredAt: fall.back, running: [] })
    }
  }
  return found
}

function leakageFalls(level: Series | null): DeadRun[] {
  const usual = level === null ? null : usualLevel(level)
  if (level === null || usual === null || usual.mostlyNothing) return []
  return telling(deadRuns(level, usual), level)
}

function voltageFalls(voltage: Series | undefined, volts = DEFAULT_VOLTS): DeadRun[] {
  return voltage === undefined ? [] : telling(deadRuns(voltage, { nothing: volts / 2, alive: volts / 2 }), voltage)
}

function telling(runs: readonly DeadRun[], series: Series): DeadRun[] {
  const limit = gapLimit(series) || 0
  return runs.filter(
    (run) => run.sharp && stays(run) && run.back !== null && run.lastLive !== null && run.from - run.lastLive <= limit,
  )
}
