import type Database from 'better-sqlite3'
import { EMPTY_SERIES, type Series } from '../../../core/timeline/series.ts'
import type { ChannelState } from './channels.ts'

export type RecentRow = [t: number, channel: number, v: number]

/** The readings that have not come to rest in a block yet, keyed by time, then channel. */
export class Recent {
  readonly #ofChannel
  readonly #value
  readonly #insert
  readonly #update
  readonly #delete
  readonly #deleteChannel
  readonly #oldest
  readonly #deleteBefore
  readonly #deleteAt

  constructor(db: Database.Database) {
    this.#ofChannel = db
      .prepare<[number, number, number], [number, number]>(
        'SELECT t, v FROM recent WHERE t >= ? AND t < ? AND channel = ? ORDER BY t',
      )
      .raw()
    this.#value = db.prepare<[number, number], number>('SELECT v FROM recent WHERE t = ? AND channel = ?').pluck()
    this.#insert = db.prepare('INSERT INTO recent (t, channel, v) VALUES (?, ?, ?) ON CONFLICT DO NOTHING')
    this.#update = db.prepare('UPDATE recent SET v = ? WHERE t = ? AND channel = ?')
    this.#delete = db.prepare('DELETE FROM recent WHERE t >= ? AND t < ? AND channel = ?')
    this.#deleteChannel = db.prepare('DELETE FROM recent WHERE channel = ?')
    this.#oldest = db.prepare<[number], RecentRow>('SELECT t, channel, v FROM recent ORDER BY t, channel LIMIT ?').raw()
    this.#deleteBefore = db.prepare('DELETE FROM recent WHERE t < ?')
    this.#deleteAt = db.prepare('DELETE FROM recent WHERE t = ? AND channel <= ?')
  }

  /** Readings of a channel in [from, to); costs nothing when its bounds say there are none. */
  read(channel: ChannelState, from: number, to: number): Series {
    const low = Math.max(from, channel.recentFirst)
    const high = Math.min(to, channel.recentLast + 1)
    if (channel.recent === 0 || low >= high) return EMPTY_SERIES
    const rows = this.#ofChannel.all(low, high, channel.num)
    const t = new Float64Array(rows.length)
    const v = new Float64Array(rows.length)
    for (let i = 0; i < rows.length; i++) {
      t[i] = rows[i]![0]
      v[i] = rows[i]![1]
    }
    return { t, v }
  }

  /** True when the reading is new; false when there is one of this time already. */
  insert(t: number, channel: number, v: number): boolean {
    return this.#insert.run(t, channel, v).changes === 1
  }

  value(t: number, channel: number): number | undefined {
    return this.#value.get(t, channel)
  }

  update(t: number, channel: number, v: number): void {
    this.#update.run(v, t, channel)
  }

  remove(channel: number, from: number, to: number): void {
    this.#delete.run(from, to, channel)
  }

  removeChannel(channel: number): void {
    this.#deleteChannel.run(channel)
  }

  /** The oldest rows, in order of their key. */
  oldest(limit: number): RecentRow[] {
    return this.#oldest.all(limit)
  }

  /** Removes every row up to this key. */
  removeUpTo(t: number, channel: number): void {
    this.#deleteBefore.run(t)
    this.#deleteAt.run(t, channel)
  }
}
