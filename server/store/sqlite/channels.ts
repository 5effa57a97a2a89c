import type Database from 'better-sqlite3'
import type { ChannelExtent } from '../port.ts'

/** Where the readings of one channel lie. `recentFirst`/`recentLast` may be wider than the recent rows, never narrower. */
export interface ChannelState {
  readonly num: number
  readonly ref: string
  readonly listed: boolean
  count: number
  first: number
  last: number
  recent: number
  recentFirst: number
  recentLast: number
}

type ChannelRow = [
  num: number,
  ref: string,
  listed: number,
  count: number,
  first: number | null,
  last: number | null,
  recent: number,
  recentFirst: number | null,
  recentLast: number | null,
]

const COLUMNS = 'num, ref, listed, count, first, last, recent, recent_first, recent_last'

/** The channels of all sites, with the extents of their readings. */
export class Channels {
  readonly #byRef
  readonly #byNum
  readonly #ofSite
  readonly #extents
  readonly #save
  readonly #unlistAll
  readonly #list
  readonly #lastReading
  readonly #recentTotal

  constructor(db: Database.Database) {
    this.#byRef = db
      .prepare<[number, string], ChannelRow>(`SELECT ${COLUMNS} FROM channel WHERE site = ? AND ref = ?`)
      .raw()
    this.#byNum = db.prepare<[number], ChannelRow>(`SELECT ${COLUMNS} FROM channel WHERE num = ?`).raw()
    this.#ofSite = db.prepare<[number], number>('SELECT num FROM channel WHERE site = ?').pluck()
    this.#extents = db.prepare<[number], ChannelExtent>(
      'SELECT ref AS channel, count, first, last FROM channel WHERE site = ? AND count > 0 ORDER BY ref',
    )
    this.#save = db.prepare(
      'UPDATE channel SET count = ?, first = ?, last = ?, recent = ?, recent_first = ?, recent_last = ? WHERE num = ?',
    )
    this.#unlistAll = db.prepare<[number]>('UPDATE channel SET listed = 0 WHERE site = ?')
    this.#list = db.prepare<[number, string]>(
      'INSERT INTO channel (site, ref, listed) VALUES (?, ?, 1) ON CONFLICT (site, ref) DO UPDATE SET listed = 1',
    )
    this.#lastReading = db.prepare<[number], number | null>('SELECT max(last) FROM channel WHERE site = ?').pluck()
    this.#recentTotal = db.prepare<[], number>('SELECT total(recent) FROM channel').pluck()
  }

  byRef(site: number, ref: string): ChannelState | undefined {
    return stateOf(this.#byRef.get(site, ref))
  }

  byNum(num: number): ChannelState | undefined {
    return stateOf(this.#byNum.get(num))
  }

  numsOf(site: number): number[] {
    return this.#ofSite.all(site)
  }

  extents(site: number): ChannelExtent[] {
    return this.#extents.all(site)
  }

  save(c: ChannelState): void {
    const some = c.recent > 0
    this.#save.run(
      c.count,
      c.count > 0 ? c.first : null,
      c.count > 0 ? c.last : null,
      c.recent,
      some ? c.recentFirst : null,
      some ? c.recentLast : null,
      c.num,
    )
  }

  /** Makes these the channels of the sheet; others keep their readings and take no more. */
  setListed(site: number, refs: readonly string[]): void {
    this.#unlistAll.run(site)
    for (const ref of refs) this.#list.run(site, ref)
  }

  lastReading(site: number): number | null {
    return this.#lastReading.get(site) ?? null
  }

  /** How many recent rows there are in all. */
  recentTotal(): number {
    return this.#recentTotal.get() ?? 0
  }
}

function stateOf(row: ChannelRow | undefined): ChannelState | undefined {
  if (row === undefined) return undefined
  const [num, ref, listed, count, first, last, recent, recentFirst, recentLast] = row
  return {
    num,
    ref,
    listed: listed === 1,
    count,
    first: first ?? Number.POSITIVE_INFINITY,
    last: last ?? Number.NEGATIVE_INFINITY,
    recent,
    recentFirst: recentFirst ?? Number.POSITIVE_INFINITY,
    recentLast: recentLast ?? Number.NEGATIVE_INFINITY,
  }
}
