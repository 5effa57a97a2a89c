import type Database from 'better-sqlite3'
import { CoreError } from '../../../core/errors.ts'
import type { Series } from '../../../core/timeline/series.ts'
import { StoreError } from '../port.ts'
import { decodeBlockInto, encodeBlock } from './codec.ts'
import { crc32 } from './crc32.ts'

export const HOUR_MS = 3_600_000
/** Hours since the epoch stay below this until the year 2209. */
const HOURS = 2 ** 21

/** Summary of a block: what stands beside its packed readings. */
export interface BlockHead {
  readonly key: number
  readonly n: number
  readonly tFirst: number
  readonly vFirst: number
  readonly tMin: number
  readonly vMin: number
  readonly tMax: number
  readonly vMax: number
  readonly tLast: number
  readonly vLast: number
}

type HeadRow = [number, number, number, number, number, number, number, number, number, number]
type DataRow = [key: number, n: number, crc: number, data: Uint8Array]

/** The hour of an instant, counted from the epoch. */
export function hourOf(ms: number): number {
  return Math.floor(ms / HOUR_MS)
}

/** The key of a channel's block of one hour. */
export function blockKey(channel: number, hour: number): number {
  return channel * HOURS + hour
}

/** The packed readings: one block per channel and hour. Ranges are of keys, both ends included. */
export class Blocks {
  readonly #heads
  readonly #range
  readonly #count
  readonly #bounds
  readonly #data
  readonly #write
  readonly #pack
  readonly #deleteRange
  readonly #unpackRange

  constructor(db: Database.Database) {
    this.#heads = db
      .prepare<[number, number], HeadRow>(
        `SELECT key, n, t_first, v_first, t_min, v_min, t_max, v_max, t_last, v_last FROM block
         WHERE key BETWEEN ? AND ? ORDER BY key`,
      )
      .raw()
    this.#range = db
      .prepare<[number, number], DataRow>('SELECT key, n, crc, data FROM packed WHERE key BETWEEN ? AND ? ORDER BY key')
      .raw()
    this.#count = db.prepare<[number, number], number>('SELECT total(n) FROM block WHERE key BETWEEN ? AND ?').pluck()
    this.#bounds = db.prepare<[number], [number, number]>('SELECT t_first, t_last FROM block WHERE key = ?').raw()
    this.#data = db.prepare<[number], DataRow>('SELECT key, n, crc, data FROM packed WHERE key = ?').raw()
    this.#write = db.prepare(
      `INSERT OR REPLACE INTO block
       (key, n, t_first, t_last, v_first, v_last, v_min, t_min, v_max, t_max, sum)
       VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`,
    )
    this.#pack = db.prepare('INSERT OR REPLACE INTO packed (key, n, crc, data) VALUES (?, ?, ?, ?)')
    this.#deleteRange = db.prepare<[number, number]>('DELETE FROM block WHERE key BETWEEN ? AND ?')
    this.#unpackRange = db.prepare<[number, number]>('DELETE FROM packed WHERE key BETWEEN ? AND ?')
  }

  heads(low: number, high: number): BlockHead[] {
    return this.#heads.all(low, high).map(([key, n, tFirst, vFirst, tMin, vMin, tMax, vMax, tLast, vLast]) => {
      return { key, n, tFirst, vFirst, tMin, vMin, tMax, vMax, tLast, vLast }
    })
  }

  /** First and last time within a block; undefined when there is none. */
  bounds(key: number): readonly [first: number, last: number] | undefined {
    return this.#bounds.get(key)
  }

  /** All readings of a block; undefined when there is none. @throws {StoreError} corrupt */
  read(key: number): Series | undefined {
    const row = this.#data.get(key)
    if (row === undefined) return undefined
    const t = new Float64Array(row[1])
    const v = new Float64Array(row[1])
    unpack(row, t, v, 0)
    return { t, v }
  }

  /** All readings of the blocks of a range, in order. @throws {StoreError} corrupt */
  readRange(low: number, high: number): Series {
    const total = this.#count.get(low, high)!
    const t = new Float64Array(total)
    const v = new Float64Array(total)
    let offset = 0
    for (const row of this.#range.iterate(low, high)) {
      unpack(row, t, v, offset)
      offset += row[1]
    }
    return { t, v }
  }

  /** Writes a block anew; the series holds at least one reading, all of one hour. */
  write(key: number, series: Series): void {
    const { t, v } = series
    const n = t.length
    let min = 0
    let max = 0
    let sum = 0
    for (let i = 0; i < n; i++) {
      const x = v[i]!
      sum += x
      if (x < v[min]!) min = i
      if (x > v[max]!) max = i
    }
    const data = encodeBlock(t, v)
    const last = n - 1
    this.#write.run(
      key,
      n,
      t[0],
      t[last],
      v[0],
      v[last],
      v[min],
      t[min],
      v[max],
      t[max],
      Number.isFinite(sum) ? sum : 0,
    )
    this.#pack.run(key, n, crc32(data), data)
  }

  deleteChannel(channel: number): void {
    this.#deleteRange.run(blockKey(channel, 0), blockKey(channel, HOURS - 1))
    this.#unpackRange.run(blockKey(channel, 0), blockKey(channel, HOURS - 1))
  }
}

/** Decodes a row into t and v from `offset` on. The checksum comes first: damaged bytes could mean anything. */
function unpack([key, n, crc, data]: DataRow, t: Float64Array, v: Float64Array, offset: number): void {
  if (crc32(data) !== crc) throw damaged(key)
  try {
    decodeBlockInto(data, n, t, v, offset)
  } catch (error) {
    if (error instanceof CoreError || error instanceof RangeError) throw damaged(key, error)
    throw error
  }
}

/** A damaged block, named by the number of its channel until `nameChannel` knows better. */
export class DamagedBlock extends Error {
  readonly channel: number
  readonly hour: number

  constructor(key: number, cause?: unknown) {
    super(`block ${key} is damaged`, { cause })
    this.channel = Math.floor(key / HOURS)
    this.hour = key % HOURS
  }
}

function damaged(key: number, cause?: unknown): DamagedBlock {
  return new DamagedBlock(key, cause)
}

/** The error a caller sees for a damaged block. */
export function nameDamage(block: DamagedBlock, channel: string): StoreError {
  const hour = new Date(block.hour * HOUR_MS).toISOString()
  return new StoreError(
    'corrupt',
    `The readings of channel "${channel}" in the hour from ${hour} are damaged (checksum); restore them from a backup.`,
    { cause: block },
  )
}
