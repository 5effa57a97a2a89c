import { expect } from 'vitest'
import { SiteSheet } from '../../../core/contract/index.ts'
import type { Series } from '../../../core/timeline/series.ts'
import type { Act, ReadingBatch } from '../../../server/store/port.ts'

export const T0 = Date.UTC(2026, 8, 21)
export const HOUR = 3_600_000
export const ACT: Act = Object.freeze({ by: 'Anna', at: T0 })

/** A village bakery's board, as far as the store cares: names and channels. */
export function bakery(name = 'Village bakery'): SiteSheet {
  return SiteSheet.parse({
    name,
    timeZone: 'Europe/Vienna',
    rcds: [{ ref: 'A', ratedMa: 30 }],
    channels: [
      { ref: 'tails-a', quantity: 'leakage', rcd: 'A' },
      { ref: 'rain', quantity: 'rain' },
    ],
  })
}

export function batch(rows: readonly (readonly [t: number, v: number])[], channel = 'tails-a'): ReadingBatch {
  return { channel, t: Float64Array.from(rows, (r) => r[0]), v: Float64Array.from(rows, (r) => r[1]) }
}

export const rowsOf = ({ t, v }: Series): [number, number][] => [...t].map((time, i) => [time, v[i]!])

export const code = (name: string): unknown => expect.objectContaining({ name: 'StoreError', code: name })

/** A hash of 32 equal bytes. */
export const bytes = (fill: number): Uint8Array => new Uint8Array(32).fill(fill)
