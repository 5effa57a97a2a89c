import type Database from 'better-sqlite3'
import type { MessageStore, RefusedMessage, RefusedMessageRecord } from '../alert-port.ts'
import type { Within } from './within.ts'

const KEPT_PER_SITE = 100
const ARRIVALS_KEPT_MS = 7 * 86_400_000

/** Refused messages and first arrivals. */
export class Messages implements MessageStore {
  readonly #within: Within
  readonly #refuse
  readonly #trim
  readonly #list
  readonly #arrival
  readonly #arrive
  readonly #forget

  constructor(db: Database.Database, within: Within) {
    this.#within = within
    this.#refuse = db.prepare(
      `INSERT INTO refused_message (site, topic, why, count, first_at, last_at, bytes, sample)
       VALUES (@site, @topic, @why, 1, @at, @at, @bytes, @sample)
       ON CONFLICT (site, topic, why) DO UPDATE
       SET count = count + 1, last_at = @at, bytes = @bytes, sample = @sample`,
    )
    this.#trim = db.prepare(
      `DELETE FROM refused_message WHERE site = ? AND num NOT IN
       (SELECT num FROM refused_message WHERE site = ? ORDER BY last_at DESC, num DESC LIMIT ${KEPT_PER_SITE})`,
    )
    this.#list = db.prepare<[number], RefusedMessageRecord>(
      `SELECT topic, why, count, first_at AS firstAt, last_at AS lastAt, bytes, sample FROM refused_message
       WHERE site = ? ORDER BY last_at DESC, num DESC`,
    )
    this.#arrival = db.prepare<[Uint8Array], number>('SELECT at FROM message_arrival WHERE digest = ?').pluck()
    this.#arrive = db.prepare('INSERT OR REPLACE INTO message_arrival (digest, at) VALUES (?, ?)')
    this.#forget = db.prepare('DELETE FROM message_arrival WHERE at < ?')
  }

  async refuse(site: string, message: RefusedMessage): Promise<void> {
    this.#within.write(() => {
      const num = this.#within.site(site)
      this.#refuse.run({ ...message, site: num })
      this.#trim.run(num, num)
    })
  }

  async refused(site: string): Promise<readonly RefusedMessageRecord[]> {
    return this.#within.read(() => this.#list.all(this.#within.site(site)))
  }

  async arrivedAt(digest: Uint8Array, now: number, again: boolean): Promise<number> {
    return this.#within.write(() => {
      const first = again ? this.#arrival.get(digest) : undefined
      if (first !== undefined) return first
      this.#arrive.run(digest, now)
      this.#forget.run(now - ARRIVALS_KEPT_MS)
      return now
    })
  }
}
