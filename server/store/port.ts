import type { KeyRole, RecordBodies, RecordKind, SiteSheet } from '../../core/contract/index.ts'
import type { Series } from '../../core/timeline/series.ts'
import type { AlertStore, MessageStore } from './alert-port.ts'

/** Readings of one channel on their way in: any order, repeats allowed; finite values, times in range. */
export interface ReadingBatch {
  readonly channel: string
  readonly t: Float64Array
  readonly v: Float64Array
}

export interface AppendReport {
  readonly stored: number
  readonly repeated: number
  readonly conflicting: number
}

export interface SiteRecord {
  readonly id: string
  readonly sheet: SiteSheet
  readonly createdAt: number
  readonly updatedAt: number
  /** Rises with every change of anything of the site: sheet, readings, records. */
  readonly revision: number
  /** Time of the latest reading of any channel; null before the first. */
  readonly lastReadingAt: number | null
}

export interface Page<T> {
  readonly items: readonly T[]
  /** Pass as `after` to go on; null at the end. */
  readonly next: string | null
}

export interface PageQuery {
  readonly after?: string | undefined
  readonly limit: number
}

export interface StoredRecord<K extends RecordKind = RecordKind> {
  readonly id: string
  readonly kind: K
  readonly body: RecordBodies[K]
  readonly recordedAt: number
  readonly recordedBy: string
  readonly corrections: number
}

export interface CorrectionRecord {
  readonly at: number
  readonly by: string
  readonly action: 'changed' | 'deleted'
  readonly before: Readonly<Record<string, unknown>>
}

export interface KeyRecord {
  readonly id: string
  readonly site: string | null
  readonly role: KeyRole
  readonly label: string
  readonly createdAt: number
  readonly lastUsedAt: number | null
  readonly endedAt: number | null
}

/** Who does something, and when (epoch ms): what corrections keep. */
export interface Act {
  readonly by: string
  readonly at: number
}

/** Summary of what is stored of one channel. */
export interface ChannelExtent {
  readonly channel: string
  readonly count: number
  readonly first: number
  readonly last: number
}

/** First, least, greatest and last reading of a pixel column; see core/timeline/columns. */
export interface TraceColumns {
  readonly t: Float64Array
  /** NaN where a gap lies. */
  readonly v: Float64Array
  readonly exact: boolean
  readonly stored: number
}

/** The reading half of the store: what analysis opens on its own, read-only. */
export interface StoreReader {
  site(id: string): Promise<SiteRecord | undefined>
  sites(query: PageQuery & { readonly search?: string | undefined }): Promise<Page<SiteRecord>>
  /** Readings in [from, to), sorted, each time once. Empty for a channel without readings. */
  readings(site: string, channel: string, from: number, to: number): Promise<Series>
  /** The same in pieces of bounded size, in order. */
  readingPieces(site: string, channel: string, from: number, to: number): AsyncIterable<Series>
  trace(site: string, channel: string, from: number, to: number, columns: number): Promise<TraceColumns>
  extents(site: string): Promise<readonly ChannelExtent[]>
  /** Records of a kind that touch [from, to), by time, then id. */
  records<K extends RecordKind>(
    site: string,
    kind: K,
    query: PageQuery & { readonly from?: number | undefined; readonly to?: number | undefined },
  ): Promise<Page<StoredRecord<K>>>
  record<K extends RecordKind>(site: string, kind: K, id: string): Promise<StoredRecord<K> | undefined>
  corrections(site: string, kind: RecordKind, id: string): Promise<readonly CorrectionRecord[]>
  close(): Promise<void>
}

/** What `keep` did with each body, in order. */
export interface KeepReport {
  readonly stored: number
  readonly repeated: number
  readonly ids: readonly string[]
}

/**
 * Everything the program keeps. Asynchronous and free of any dialect; nothing above it knows how readings rest.
 * What a call has resolved survives a kill and a power cut.
 * @throws {StoreError} from every call; see its codes.
 */
export interface Store extends StoreReader {
  /** Matters, settings and the outbox of alerts. */
  readonly alerts: AlertStore
  /** What brokers sent that could not be taken. */
  readonly messages: MessageStore

  createSite(sheet: SiteSheet, act: Act): Promise<SiteRecord>
  /** Replaces the sheet; keeps the old one with who and when. Channels that left it keep their readings. */
  updateSite(id: string, sheet: SiteSheet, act: Act): Promise<SiteRecord>
  /** Removes a site with all that hangs on it. False when there is none. */
  deleteSite(id: string): Promise<boolean>

  /** One transaction for all batches; idempotent by (channel, time). With `replace`, a new value wins and counts as stored. */
  append(
    site: string,
    batches: readonly ReadingBatch[],
    options?: { readonly replace?: boolean },
  ): Promise<AppendReport>
  /** Moves recent readings to their resting place; at most `budget` readings a call. Resolves with how many were moved. */
  settle(budget: number): Promise<number>

  /** Keeps new records in one transaction; a body that is there already (also one corrected since) counts as repeated. */
  keep<K extends RecordKind>(site: string, kind: K, bodies: readonly RecordBodies[K][], act: Act): Promise<KeepReport>
  correct<K extends RecordKind>(
    site: string,
    kind: K,
    id: string,
    body: RecordBodies[K],
    act: Act,
  ): Promise<StoredRecord<K> | undefined>
  remove(site: string, kind: RecordKind, id: string, act: Act): Promise<boolean>

  addKey(
    key: {
      readonly id: string
      readonly site: string | null
      readonly role: KeyRole
      readonly label: string
      readonly hash: Uint8Array
    },
    act: Act,
  ): Promise<void>
  keys(site: string): Promise<readonly KeyRecord[]>
  /** The key with this hash, ended ones too. */
  keyByHash(hash: Uint8Array): Promise<KeyRecord | undefined>
  hasOwnerKey(): Promise<boolean>
  touchKey(id: string, at: number): Promise<void>
  endKey(site: string, id: string, act: Act): Promise<boolean>

  /** A signed-in page. The token's hash is kept, never the token. */
  addSession(session: {
    readonly hash: Uint8Array
    readonly keyId: string
    readonly createdAt: number
    readonly expiresAt: number
  }): Promise<void>
  /** The key behind a session that has not expired at `now` and whose key has not ended. */
  sessionKey(hash: Uint8Array, now: number): Promise<KeyRecord | undefined>
  endSession(hash: Uint8Array): Promise<void>

  /** Findings kept under a hash of what they were computed from. */
  cachedFindings(hash: string): Promise<string | undefined>
  cacheFindings(entry: {
    readonly hash: string
    readonly site: string
    readonly body: string
    readonly at: number
  }): Promise<void>
}

export type StoreErrorCode =
  | 'no_such_site'
  | 'no_such_channel'
  | 'disk_full'
  | 'newer_schema'
  | 'changed_migration'
  | 'corrupt'
  | 'closed'
  | 'busy'

/** Why the store would not do something; nothing of that call was kept. */
export class StoreError extends Error {
  readonly code: StoreErrorCode

  constructor(code: StoreErrorCode, message: string, options?: ErrorOptions) {
    super(message, options)
    this.name = 'StoreError'
    this.code = code
  }
}
