import type Database from 'better-sqlite3'
import type { KeyRole } from '../../../core/contract/index.ts'
import type { Act, KeyRecord } from '../port.ts'

/** A use within this time of the last noted one is not noted again: telling days apart needs no write per call. */
const TOUCH_MS = 60_000

interface NewKey {
  readonly id: string
  readonly role: KeyRole
  readonly label: string
  readonly hash: Uint8Array
}

interface NewSession {
  readonly hash: Uint8Array
  readonly keyId: string
  readonly createdAt: number
  readonly expiresAt: number
}

const SELECT = `SELECT access_key.id, site.id AS site, role, label, access_key.created_at AS createdAt,
  last_used_at AS lastUsedAt, ended_at AS endedAt FROM access_key LEFT JOIN site ON site.num = access_key.site`

/** Keys and signed-in pages; only hashes of either are kept. The caller holds the transaction. */
export class Keys {
  readonly #insert
  readonly #ofSite
  readonly #byHash
  readonly #anyOwner
  readonly #lastUsed
  readonly #touch
  readonly #end
  readonly #insertSession
  readonly #dropExpired
  readonly #bySession
  readonly #deleteSession

  constructor(db: Database.Database) {
    this.#insert = db.prepare(
      `INSERT INTO access_key (id, site, role, label, hash, created_at, created_by) VALUES (?, ?, ?, ?, ?, ?, ?)`,
    )
    this.#ofSite = db.prepare<[number], KeyRecord>(
      `${SELECT} WHERE access_key.site = ? ORDER BY access_key.created_at, access_key.id`,
    )
    this.#byHash = db.prepare<[Uint8Array], KeyRecord>(`${SELECT} WHERE hash = ?`)
    this.#anyOwner = db
      .prepare<[], number>(`SELECT 1 FROM access_key WHERE role = 'owner' AND ended_at IS NULL LIMIT 1`)
      .pluck()
    this.#lastUsed = db.prepare<[string], number | null>('SELECT last_used_at FROM access_key WHERE id = ?').pluck()
    this.#touch = db.prepare('UPDATE access_key SET last_used_at = ? WHERE id = ?')
    this.#end = db.prepare(
      'UPDATE access_key SET ended_at = ?, ended_by = ? WHERE id = ? AND site = ? AND ended_at IS NULL',
    )
    this.#insertSession = db.prepare(
      'INSERT INTO session (hash, access_key, created_at, expires_at) VALUES (?, ?, ?, ?)',
    )
    this.#dropExpired = db.prepare('DELETE FROM session WHERE expires_at <= ?')
    this.#bySession = db.prepare<[Uint8Array, number], KeyRecord>(
      `${SELECT} JOIN session ON session.access_key = access_key.id
       WHERE session.hash = ? AND session.expires_at > ? AND ended_at IS NULL`,
    )
    this.#deleteSession = db.prepare('DELETE FROM session WHERE hash = ?')
  }

  add(site: number | null, key: NewKey, act: Act): void {
    this.#insert.run(key.id, site, key.role, key.label, key.hash, act.at, act.by)
  }

  ofSite(site: number): KeyRecord[] {
    return this.#ofSite.all(site)
  }

  byHash(hash: Uint8Array): KeyRecord | undefined {
    return this.#byHash.get(hash)
  }

  hasOwner(): boolean {
    return this.#anyOwner.get() === 1
  }

  /** Whether a use at this time is worth noting. */
  isStale(id: string, at: number): boolean {
    const last = this.#lastUsed.get(id)
    return last === null || (last !== undefined && at - last >= TOUCH_MS)
  }

  touch(id: string, at: number): void {
    this.#touch.run(at, id)
  }

  end(site: number, id: string, act: Act): boolean {
    return this.#end.run(act.at, act.by, id, site).changes === 1
  }

  addSession(session: NewSession): void {
    this.#dropExpired.run(session.createdAt)
    this.#insertSession.run(session.hash, session.keyId, session.createdAt, session.expiresAt)
  }

  bySession(hash: Uint8Array, now: number): KeyRecord | undefined {
    return this.#bySession.get(hash, now)
  }

  endSession(hash: Uint8Array): void {
    this.#deleteSession.run(hash)
  }
}
