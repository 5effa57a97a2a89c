import type Database from 'better-sqlite3'
import type { RecordKind } from '../../../core/contract/index.ts'
import { EMPTY_SERIES, type Series } from '../../../core/timeline/series.ts'
import {
  type ChannelExtent,
  type CorrectionRecord,
  type Page,
  type PageQuery,
  type SiteRecord,
  type StoredRecord,
  StoreError,
  type StoreReader,
  type TraceColumns,
} from '../port.ts'
import { Blocks, DamagedBlock, nameDamage } from './blocks.ts'
import { type ChannelState, Channels } from './channels.ts'
import { translateFault } from './faults.ts'
import { cutSpan, readSpan, slices } from './reading.ts'
import { Recent } from './recent.ts'
import { Records } from './records.ts'
import { Sites } from './sites.ts'
import { traceSpan } from './trace.ts'

const NO_TRACE: TraceColumns = { ...EMPTY_SERIES, exact: true, stored: 0 }

/** The reading half of the store on one connection. Every call sees one state of the data. */
export class SqliteReader implements StoreReader {
  protected readonly db: Database.Database
  protected readonly channels: Channels
  protected readonly siteTable: Sites
  protected readonly blocks: Blocks
  protected readonly recent: Recent
  protected readonly recordTable: Records
  readonly #transaction

  constructor(db: Database.Database) {
    this.db = db
    this.channels = new Channels(db)
    this.siteTable = new Sites(db, this.channels)
    this.blocks = new Blocks(db)
    this.recent = new Recent(db)
    this.recordTable = new Records(db)
    this.#transaction = db.transaction((work: () => unknown) => work())
  }

  async site(id: string): Promise<SiteRecord | undefined> {
    return this.read(() => this.siteTable.one(id))
  }

  async sites(query: PageQuery & { readonly search?: string | undefined }): Promise<Page<SiteRecord>> {
    return this.read(() => this.siteTable.page(query))
  }

  async readings(site: string, channel: string, from: number, to: number): Promise<Series> {
    return this.read(() => {
      const state = this.#channel(site, channel)
      return state === undefined ? EMPTY_SERIES : readSpan(this.blocks, this.recent, state, from, to)
    })
  }

  async *readingPieces(site: string, channel: string, from: number, to: number): AsyncIterable<Series> {
    const cuts = this.read(() => {
      const state = this.#channel(site, channel)
      return state === undefined ? [] : cutSpan(this.blocks, state, from, to)
    })
    for (let i = 1; i < cuts.length; i++) yield* slices(await this.readings(site, channel, cuts[i - 1]!, cuts[i]!))
  }

  async trace(site: string, channel: string, from: number, to: number, columns: number): Promise<TraceColumns> {
    return this.read(() => {
      const state = this.#channel(site, channel)
      return state === undefined ? NO_TRACE : traceSpan(this.blocks, this.recent, state, from, to, columns)
    })
  }

  async extents(site: string): Promise<readonly ChannelExtent[]> {
    return this.read(() => this.channels.extents(this.siteTable.need(site)))
  }

  async records<K extends RecordKind>(
    site: string,
    kind: K,
    query: PageQuery & { readonly from?: number | undefined; readonly to?: number | undefined },
  ): Promise<Page<StoredRecord<K>>> {
    return this.read(() => this.recordTable.page(this.siteTable.need(site), kind, query))
  }

  async record<K extends RecordKind>(site: string, kind: K, id: string): Promise<StoredRecord<K> | undefined> {
    return this.read(() => this.recordTable.one(this.siteTable.need(site), kind, id))
  }

  async corrections(site: string, kind: RecordKind, id: string): Promise<readonly CorrectionRecord[]> {
    return this.read(() => this.recordTable.history(this.siteTable.need(site), kind, id))
  }

  async close(): Promise<void> {
    this.db.close()
  }

  /** Runs queries on one state of the data. @throws {StoreError} */
  protected read<T>(work: () => T): T {
    return this.#guard(() => this.#transaction.deferred(work) as T)
  }

  /** Runs changes in one transaction: all of them are kept, durably, or none. @throws {StoreError} */
  protected write<T>(work: () => T): T {
    return this.#guard(() => this.#transaction.immediate(work) as T)
  }

  #guard<T>(work: () => T): T {
    if (!this.db.open) throw new StoreError('closed', 'The store is closed.')
    try {
      return work()
    } catch (error) {
      if (error instanceof DamagedBlock) {
        throw nameDamage(error, this.channels.byNum(error.channel)?.ref ?? `number ${error.channel}`)
      }
      throw translateFault(error)
    }
  }

  #channel(site: string, ref: string): ChannelState | undefined {
    return this.channels.byRef(this.siteTable.need(site), ref)
  }
}
