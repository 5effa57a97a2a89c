import type Database from 'better-sqlite3'
import type { KeyRole, RecordBodies, RecordKind, SiteSheet } from '../../../core/contract/index.ts'
import {
  type Act,
  type AppendReport,
  type KeepReport,
  type KeyRecord,
  type ReadingBatch,
  type SiteRecord,
  type Store,
  type StoredRecord,
  StoreError,
} from '../port.ts'
import { Alerts } from './alerts.ts'
import { FindingsCache } from './findings-cache.ts'
import { Keys } from './keys.ts'
import { Messages } from './messages.ts'
import { SqliteReader } from './reader.ts'
import { Writing } from './writing.ts'

/** More recent rows than this, and an append brings some of them to rest first. */
const RECENT_LIMIT = 20_000
const SETTLED_BY_APPEND = 10_000
/** The most rows sealed in one transaction, so that none holds the store for long. */
const SEALED_AT_ONCE = 5_000

/** The whole store on one writing connection. */
export class SqliteStore extends SqliteReader implements Store {
  readonly alerts: Alerts
  readonly messages: Messages
  readonly #writing: Writing
  readonly #keys: Keys
  readonly #cache: FindingsCache
  readonly #letGo: () => void
  #recentRows: number
  #settleAbove = RECENT_LIMIT

  /** @param letGo releases the claim on the file, after the connection is closed */
  constructor(db: Database.Database, letGo: () => void) {
    super(db)
    this.#writing = new Writing(this.blocks, this.recent, this.channels)
    this.#keys = new Keys(db)
    this.#cache = new FindingsCache(db)
    const within = {
      read: <T>(work: () => T): T => this.read(work),
      write: <T>(work: () => T): T => this.write(work),
      site: (id: string): number => this.siteTable.need(id),
    }
    this.alerts = new Alerts(db, within)
    this.messages = new Messages(db, within)
    this.#letGo = letGo
    this.#recentRows = this.channels.recentTotal()
  }

  async createSite(sheet: SiteSheet, act: Act): Promise<SiteRecord> {
    return this.write(() => this.siteTable.create(sheet, act))
  }

  async updateSite(id: string, sheet: SiteSheet, act: Act): Promise<SiteRecord> {
    return this.write(() => this.siteTable.update(id, sheet, act))
  }

  async deleteSite(id: string): Promise<boolean> {
    const gone = this.write(() => {
      const num = this.siteTable.numOf(id)
      if (num === undefined) return false
      for (const channel of this.channels.numsOf(num)) {
        this.blocks.deleteChannel(channel)
        this.recent.removeChannel(channel)
      }
      this.siteTable.remove(num)
      return true
    })
    this.#recentRows = this.channels.recentTotal()
    return gone
  }

  async append(
    site: string,
    batches: readonly ReadingBatch[],
    options: { readonly replace?: boolean } = {},
  ): Promise<AppendReport> {
    if (this.#recentRows > this.#settleAbove) await this.#settleSome()
    const { report, recentRows } = this.write(() => {
      const num = this.siteTable.need(site)
      const done = this.#writing.append(num, batches, options.replace === true)
      if (done.report.stored > 0) this.siteTable.bump(num)
      return done
    })
    this.#recentRows += recentRows
    return report
  }

  async settle(budget: number): Promise<number> {
    let moved = 0
    while (moved < budget) {
      const sealed = this.write(() => this.#writing.seal(Math.min(budget - moved, SEALED_AT_ONCE)))
      if (sealed === 0) break
      moved += sealed
      this.#recentRows -= sealed
    }
    return moved
  }

  /** Brings some recent rows to rest. A damaged block in the way is told to whoever reads it; intake goes on. */
  async #settleSome(): Promise<void> {
    try {
      await this.settle(SETTLED_BY_APPEND)
      this.#settleAbove = RECENT_LIMIT
    } catch (error) {
      if (!(error instanceof StoreError && error.code === 'corrupt')) throw error
      this.#settleAbove = this.#recentRows + SETTLED_BY_APPEND
    }
  }

  async keep<K extends RecordKind>(
    site: string,
    kind: K,
    bodies: readonly RecordBodies[K][],
    act: Act,
  ): Promise<KeepReport> {
    return this.write(() => {
      const num = this.siteTable.need(site)
      const report = this.recordTable.keep(num, kind, bodies, act)
      if (report.stored > 0) this.siteTable.bump(num)
      return report
    })
  }

  async correct<K extends RecordKind>(
    site: string,
    kind: K,
    id: string,
    body: RecordBodies[K],
    act: Act,
  ): Promise<StoredRecord<K> | undefined> {
    return this.write(() => {
      const num = this.siteTable.need(site)
      if (this.recordTable.correct(num, kind, id, body, act)) this.siteTable.bump(num)
      return this.recordTable.one(num, kind, id)
    })
  }

  async remove(site: string, kind: RecordKind, id: string, act: Act): Promise<boolean> {
    return this.write(() => {
      const num = this.siteTable.need(site)
      const gone = this.recordTable.remove(num, kind, id, act)
      if (gone) this.siteTable.bump(num)
      return gone
    })
  }

  async addKey(
    key: {
      readonly id: string
      readonly site: string | null
      readonly role: KeyRole
      readonly label: string
      readonly hash: Uint8Array
    },
    act: Act,
  ): Promise<void> {
    this.write(() => this.#keys.add(key.site === null ? null : this.siteTable.need(key.site), key, act))
  }

  async keys(site: string): Promise<readonly KeyRecord[]> {
    return this.read(() => this.#keys.ofSite(this.siteTable.need(site)))
  }

  async keyByHash(hash: Uint8Array): Promise<KeyRecord | undefined> {
    return this.read(() => this.#keys.byHash(hash))
  }

  async hasOwnerKey(): Promise<boolean> {
    return this.read(() => this.#keys.hasOwner())
  }

  async touchKey(id: string, at: number): Promise<void> {
    if (this.read(() => this.#keys.isStale(id, at))) this.write(() => this.#keys.touch(id, at))
  }

  async endKey(site: string, id: string, act: Act): Promise<boolean> {
    return this.write(() => this.#keys.end(this.siteTable.need(site), id, act))
  }

  async addSession(session: {
    readonly hash: Uint8Array
    readonly keyId: string
    readonly createdAt: number
    readonly expiresAt: number
  }): Promise<void> {
    this.write(() => this.#keys.addSession(session))
  }

  async sessionKey(hash: Uint8Array, now: number): Promise<KeyRecord | undefined> {
    return this.read(() => this.#keys.bySession(hash, now))
  }

  async endSession(hash: Uint8Array): Promise<void> {
    this.write(() => this.#keys.endSession(hash))
  }

  async cachedFindings(hash: string): Promise<string | undefined> {
    return this.read(() => this.#cache.get(hash))
  }

  async cacheFindings(entry: {
    readonly hash: string
    readonly site: string
    readonly body: string
    readonly at: number
  }): Promise<void> {
    this.write(() => this.#cache.put(this.siteTable.need(entry.site), entry.hash, entry.body, entry.at))
  }

  override async close(): Promise<void> {
    if (!this.db.open) return
    try {
      this.db.pragma('wal_checkpoint(TRUNCATE)')
    } finally {
      this.db.close()
      this.#letGo()
    }
  }
}
