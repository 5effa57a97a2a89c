import type Database from 'better-sqlite3'

/** The most findings kept per site; older ones make room. */
const KEPT_PER_SITE = 200

/** Findings by a hash of what they were computed from. The caller holds the transaction. */
export class FindingsCache {
  readonly #get
  readonly #put
  readonly #trim

  constructor(db: Database.Database) {
    this.#get = db.prepare<[string], string>('SELECT body FROM findings WHERE hash = ?').pluck()
    this.#put = db.prepare('INSERT OR REPLACE INTO findings (hash, site, at, body) VALUES (?, ?, ?, ?)')
    this.#trim = db.prepare(
      `DELETE FROM findings WHERE site = ? AND num <=
       (SELECT num FROM findings WHERE site = ? ORDER BY num DESC LIMIT 1 OFFSET ${KEPT_PER_SITE})`,
    )
  }

  get(hash: string): string | undefined {
    return this.#get.get(hash)
  }

  put(site: number, hash: string, body: string, at: number): void {
    this.#put.run(hash, site, at, body)
    this.#trim.run(site, site)
  }
}
