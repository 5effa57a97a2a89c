import { SiteSheet } from '../../../core/contract/index.ts'
import { spansOf } from '../../../core/timeline/spans.ts'
import type { Thing, Timeline, TimelineTrip } from '../../../core/timeline/timeline.ts'

export const HOUR = 3_600_000
export const MINUTE = 60_000
/** A Monday, 00:00 UTC. */
export const START: number = Date.UTC(2026, 8, 21)

/** A trip at an instant, or between two, restored half an hour later. */
export function tripAt(from: number, to: number = from): TimelineTrip {
  return { id: `t${from}`, rcd: 'A', from, to, narrowed: false, restoredAt: to + 30 * MINUTE, running: [] }
}

/** A load that runs in the given spans and is known throughout. */
export function loadOn(ref: string, on: readonly (readonly [number, number])[], from: number, to: number): Thing {
  const spans = spansOf(on)
  const off: [number, number][] = []
  let at = from
  for (let i = 0; i < spans.length; i += 2) {
    off.push([at, spans[i]!])
    at = spans[i + 1]!
  }
  off.push([at, to])
  return {
    of: `load:${ref}`,
    kind: 'load',
    ref,
    label: ref,
    circuit: '1',
    isolation: 'two-pole',
    state: { on: spans, off: spansOf(off) },
    changes: [...spans].map((t, i) => ({ at: t, on: i % 2 === 0 })).filter((c) => c.at > from && c.at < to),
    source: 'running',
    readEveryMs: null,
    leakage: null,
  }
}

/** A timeline of a whole span under supply with nothing in it but what is given. */
export function timelineOf(given: Partial<Timeline> & { readonly days?: number; readonly zone?: string }): Timeline {
  const from = given.from ?? START
  const to = given.to ?? from + (given.days ?? 7) * 24 * HOUR
  const sheet = SiteSheet.parse({
    name: 'Village bakery',
    timeZone: given.zone ?? 'UTC',
    latitude: 47.3,
    longitude: 13.4,
    rcds: [{ ref: 'A', ratedMa: 30, circuits: [{ ref: '1', loads: [] }] }],
  })
  return {
    sheet,
    rcd: sheet.rcds[0]!,
    from,
    to,
    energised: spansOf([[from, to]]),
    leakage: null,
    conductive: null,
    capacitive: null,
    logged: spansOf([]),
    gaps: [],
    things: [],
    trips: [],
    otherTrips: [],
    rain: null,
    temperature: null,
    humidity: null,
    loadCurrent: null,
    voltage: null,
    tests: [],
    remedies: [],
    notes: [],
    ...given,
  }
}
