import { SiteSheet, type SiteSheetIn } from '../../../core/contract/site-sheet.ts'
import type { Evidence } from '../../../core/timeline/evidence.ts'
import { type Series, seriesOf } from '../../../core/timeline/series.ts'

export const T0: number = Date.UTC(2026, 8, 21)
export const S = 1_000
export const M = 60_000
export const H = 3_600_000
export const D = 86_400_000

/** The bakery's sheet, in UTC so that hours can be counted by hand. */
export const bakery: SiteSheetIn = {
  name: 'Village bakery',
  timeZone: 'UTC',
  rcds: [
    {
      ref: 'A',
      ratedMa: 30,
      circuits: [
        { ref: '7', label: 'Bakehouse sockets', loads: [{ ref: 'mixer', label: 'Mixer' }, { ref: 'proving' }] },
        { ref: '8', isolation: 'two-pole', loads: [{ ref: 'freezer' }] },
      ],
    },
    { ref: 'B', ratedMa: 30, circuits: [{ ref: '1', loads: [{ ref: 'sign' }] }] },
  ],
  channels: [
    { ref: 'tails-a', quantity: 'leakage', rcd: 'A' },
    { ref: 'tails-b', quantity: 'leakage', rcd: 'B' },
    { ref: 'supply-a', quantity: 'voltage', rcd: 'A' },
    { ref: 'mixer-runs', quantity: 'running', load: 'mixer' },
    { ref: 'proving-runs', quantity: 'running', load: 'proving' },
    { ref: 'amps-freezer', quantity: 'load-current', load: 'freezer' },
    { ref: 'rain', quantity: 'rain' },
  ],
}

type Parts = Partial<Omit<Evidence, 'sheet' | 'series'>> & {
  readonly sheet?: SiteSheetIn
  readonly series?: Readonly<Record<string, Series>>
}

/** Evidence of one day of device A, with what the test adds. */
export function evidenceOf({ sheet = bakery, series = {}, ...parts }: Parts = {}): Evidence {
  return {
    sheet: SiteSheet.parse(sheet),
    rcd: 'A',
    from: T0,
    to: T0 + D,
    series: new Map(Object.entries(series)),
    trips: [],
    switchings: [],
    timetables: [],
    tests: [],
    remedies: [],
    ...parts,
  }
}

/** Readings every `step` ms over [from, to), the value a function of time since T0. */
export function logged(value: (t: number) => number, step: number = M, from = T0, to: number = T0 + D): Series {
  const n = Math.ceil((to - from) / step)
  const t = Float64Array.from({ length: n }, (_, i) => from + i * step)
  return seriesOf(
    t,
    t.map((at) => value(at - T0)),
  )
}

/** A level that is nothing within the given spans (ms since T0). */
export function levelWithout(level: number, ...dead: readonly (readonly [number, number])[]): (t: number) => number {
  return (t) => (dead.some(([from, to]) => t >= from && t < to) ? 0.02 : level)
}

/** Spans as hours since T0, for reading. */
export function hours(spans: Float64Array): number[] {
  return [...spans].map((t) => (t - T0) / H)
}
