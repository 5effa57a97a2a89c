import { EMPTY_SERIES, lowerBound, type Series } from '../../../core/timeline/series.ts'
import { type AppendReport, type ReadingBatch, StoreError } from '../port.ts'
import { type Blocks, blockKey, HOUR_MS, hourOf } from './blocks.ts'
import type { ChannelState, Channels } from './channels.ts'
import { merge, union } from './merge.ts'
import { normalise } from './normalise.ts'
import type { Recent, RecentRow } from './recent.ts'

/** So many readings of one hour are worth opening its block; fewer go to the recent rows. */
const WORTH_A_BLOCK = 32

interface Tally {
  added: number
  replaced: number
  repeated: number
  conflicting: number
}

/** The writing half of the readings. The caller holds the transaction around each call. */
export class Writing {
  readonly #blocks: Blocks
  readonly #recent: Recent
  readonly #channels: Channels

  constructor(blocks: Blocks, recent: Recent, channels: Channels) {
    this.#blocks = blocks
    this.#recent = recent
    this.#channels = channels
  }

  /** Stores batches of one site; says also by how many the recent rows grew. @throws {StoreError} no_such_channel, corrupt */
  append(
    site: number,
    batches: readonly ReadingBatch[],
    replace: boolean,
  ): { readonly report: AppendReport; readonly recentRows: number } {
    let stored = 0
    let repeated = 0
    let conflicting = 0
    let recentRows = 0
    for (const batch of byChannel(batches)) {
      const channel = this.#channels.byRef(site, batch.channel)
      if (channel === undefined || !channel.listed) {
        throw new StoreError('no_such_channel', `There is no channel "${batch.channel}" on the sheet of this site.`)
      }
      const clean = normalise(batch.t, batch.v, replace)
      const before = channel.recent
      const tally: Tally = { added: 0, replaced: 0, repeated: clean.repeated, conflicting: clean.conflicting }
      for (const part of hours(clean.series)) {
        if (part.t.length >= WORTH_A_BLOCK) this.#pack(channel, part, replace, tally)
        else this.#keepRecent(channel, part, replace, tally)
      }
      if (tally.added > 0) {
        const { t } = clean.series
        channel.count += tally.added
        channel.first = Math.min(channel.first, t[0]!)
        channel.last = Math.max(channel.last, t[t.length - 1]!)
        this.#channels.save(channel)
      }
      recentRows += channel.recent - before
      stored += tally.added + tally.replaced
      repeated += tally.repeated
      conflicting += tally.conflicting
    }
    return { report: { stored, repeated, conflicting }, recentRows }
  }

  /** Moves the oldest recent rows, at most `limit`, into blocks; returns how many. @throws {StoreError} corrupt */
  seal(limit: number): number {
    const rows = this.#recent.oldest(limit)
    const newest = rows.at(-1)
    if (newest === undefined) return 0
    const groups = new Map<number, RecentRow[]>()
    for (const row of rows) {
      const key = blockKey(row[1], hourOf(row[0]))
      const group = groups.get(key)
      if (group === undefined) groups.set(key, [row])
      else group.push(row)
    }
    const moved = new Map<number, number>()
    for (const [key, group] of groups) {
      const sealed = { t: Float64Array.from(group, (row) => row[0]), v: Float64Array.from(group, (row) => row[2]) }
      this.#blocks.write(key, union(this.#blocks.read(key) ?? EMPTY_SERIES, sealed))
      const channel = group[0]![1]
      moved.set(channel, (moved.get(channel) ?? 0) + group.length)
    }
    this.#recent.removeUpTo(newest[0], newest[1])
    for (const [num, count] of moved) {
      const channel = this.#channels.byNum(num)!
      channel.recent -= count
      channel.recentFirst = Math.max(channel.recentFirst, newest[0])
      this.#channels.save(channel)
    }
    return rows.length
  }

  /** Many readings of one hour: into its block at once, together with recent rows of the hour. */
  #pack(channel: ChannelState, part: Series, replace: boolean, tally: Tally): void {
    const hour = hourOf(part.t[0]!)
    const key = blockKey(channel.num, hour)
    const from = hour * HOUR_MS
    const waiting = this.#recent.read(channel, from, from + HOUR_MS)
    const rested = hour > hourOf(channel.last) ? undefined : this.#blocks.read(key)
    const merged = merge(union(rested ?? EMPTY_SERIES, waiting), part, replace)
    tally.added += merged.added
    tally.replaced += merged.replaced
    tally.repeated += merged.repeated
    tally.conflicting += merged.conflicting
    if (merged.added + merged.replaced === 0) return
    this.#blocks.write(key, merged.series)
    if (waiting.t.length === 0) return
    this.#recent.remove(channel.num, from, from + HOUR_MS)
    channel.recent -= waiting.t.length
    this.#channels.save(channel)
  }

  /** A few readings of one hour: one row each. A block is opened only when a time lies within it. */
  #keepRecent(channel: ChannelState, part: Series, replace: boolean, tally: Tally): void {
    const { t, v } = part
    const key = blockKey(channel.num, hourOf(t[0]!))
    const bounds = t[0]! > channel.last ? undefined : this.#blocks.bounds(key)
    let block: Series | undefined
    let changed = false
    for (let i = 0; i < t.length; i++) {
      const time = t[i]!
      const value = v[i]!
      let held: number | undefined
      if (bounds !== undefined && time >= bounds[0] && time <= bounds[1]) {
        block ??= this.#blocks.read(key)!
        const at = lowerBound(block.t, time)
        if (block.t[at] === time) {
          held = block.v[at]!
          if (held !== value && replace) {
            block.v[at] = value
            changed = true
          }
        }
      }
      if (held === undefined) {
        if (this.#recent.insert(time, channel.num, value)) {
          tally.added++
          channel.recent++
          channel.recentFirst = Math.min(channel.recentFirst, time)
          channel.recentLast = Math.max(channel.recentLast, time)
          continue
        }
        held = this.#recent.value(time, channel.num)!
        if (held !== value && replace) this.#recent.update(time, channel.num, value)
      }
      if (held === value) tally.repeated++
      else if (replace) tally.replaced++
      else tally.conflicting++
    }
    if (changed) this.#blocks.write(key, block!)
  }
}

/** Batches with the same channel joined in their order; the usual case, one each, is taken as it is. */
function byChannel(batches: readonly ReadingBatch[]): readonly ReadingBatch[] {
  const groups = new Map<string, ReadingBatch[]>()
  for (const batch of batches) {
    const group = groups.get(batch.channel)
    if (group === undefined) groups.set(batch.channel, [batch])
    else group.push(batch)
  }
  return [...groups].map(([channel, group]) =>
    group.length === 1 ? group[0]! : { channel, t: join(group.map((b) => b.t)), v: join(group.map((b) => b.v)) },
  )
}

function join(parts: readonly Float64Array[]): Float64Array {
  const all = new Float64Array(parts.reduce((n, part) => n + part.length, 0))
  let at = 0
  for (const part of parts) {
    all.set(part, at)
    at += part.length
  }
  return all
}

/** An ordered series cut at full hours, as views. */
function* hours({ t, v }: Series): Generator<Series> {
  let start = 0
  while (start < t.length) {
    const end = lowerBound(t, (hourOf(t[start]!) + 1) * HOUR_MS)
    yield { t: t.subarray(start, end), v: v.subarray(start, end) }
    start = end
  }
}
