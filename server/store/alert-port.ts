import type { AlertSettings, MatterKind } from '../../core/contract/index.ts'
import type { Act, Page, PageQuery } from './port.ts'

/** How a message travels. */
export type AlertWay = 'email' | 'webhook'

export interface AlertSettingsRecord {
  readonly settings: AlertSettings
  /** Signs the webhook; null without one. */
  readonly secret: string | null
  /** When the first settings were made: older events are not told. */
  readonly since: number
}

export interface NewMatter {
  readonly id: string
  /** What makes two notices one matter; at most one of a key is open at a time. */
  readonly key: string
  readonly kind: MatterKind
  readonly openedAt: number
  readonly text: string
  readonly figures: Readonly<Record<string, unknown>>
}

export interface DeliveryState {
  readonly way: AlertWay
  readonly target: string
  readonly state: 'waiting' | 'sent' | 'given-up'
  readonly attempts: number
  readonly nextAt: number
  readonly triedAt: number | null
  readonly doneAt: number | null
  readonly error: string | null
}

export interface MatterRecord extends NewMatter {
  readonly closedAt: number | null
  readonly deliveries: readonly DeliveryState[]
}

/** A message on its way to one place. */
export interface DeliveryRecord extends DeliveryState {
  readonly num: number
  readonly message: string
  readonly site: string
  readonly kind: MatterKind
  readonly createdAt: number
  readonly matters: readonly string[]
}

export interface NewMessage {
  readonly id: string
  readonly kind: MatterKind
  readonly createdAt: number
  /** Ids of the matters it tells, opened in the same change. */
  readonly matters: readonly string[]
  readonly to: readonly { readonly way: AlertWay; readonly target: string }[]
}

export interface MatterChange {
  readonly open: readonly NewMatter[]
  readonly close: readonly { readonly id: string; readonly at: number }[]
  readonly messages: readonly NewMessage[]
}

/** What became of an attempt to deliver. */
export type Attempt =
  | { readonly state: 'sent'; readonly at: number }
  | {
      readonly state: 'waiting' | 'given-up'
      readonly at: number
      readonly nextAt: number
      readonly error: string
    }

/** Matters, settings and the outbox of alerts. What a call has resolved survives a kill. */
export interface AlertStore {
  settings(site: string): Promise<AlertSettingsRecord | undefined>
  /** Replaces the settings; `since` stays that of the first ones. */
  saveSettings(
    site: string,
    entry: { readonly settings: AlertSettings; readonly secret: string | null },
    act: Act,
  ): Promise<void>
  /** Ids of all sites that have settings. */
  sitesWithSettings(): Promise<readonly string[]>

  /** Matters that are open, or were opened at `since` or later; oldest first. */
  mattersSince(site: string, since: number): Promise<readonly MatterRecord[]>
  mattersById(site: string, ids: readonly string[]): Promise<readonly MatterRecord[]>
  /** Newest first. */
  matters(site: string, query: PageQuery & { readonly open?: boolean | undefined }): Promise<Page<MatterRecord>>
  /** How many matters are open, by site; sites without any are left out. */
  openCounts(sites: readonly string[]): Promise<ReadonlyMap<string, number>>
  /** Opens, closes and fills the outbox in one transaction. A matter whose key is open already is not opened again, nor told. */
  change(site: string, change: MatterChange): Promise<void>

  /** Deliveries that wait and are due at `now`, longest due first; those due after `beyond` too: a clock went back. */
  due(now: number, beyond: number, limit: number): Promise<readonly DeliveryRecord[]>
  attempted(num: number, attempt: Attempt): Promise<void>
  /** Newest first. */
  deliveries(site: string, query: PageQuery): Promise<Page<DeliveryRecord>>
  /** Drops closed matters and finished messages older than this. */
  forgetAlertsBefore(at: number): Promise<void>

  paces(): Promise<readonly { readonly site: string; readonly channel: string; readonly gapMs: number }[]>
  savePaces(
    paces: readonly { readonly site: string; readonly channel: string; readonly gapMs: number }[],
  ): Promise<void>
}

export interface RefusedMessage {
  readonly topic: string
  readonly why: string
  readonly at: number
  readonly bytes: number
  /** The beginning of it, as text. */
  readonly sample: string
}

export interface RefusedMessageRecord extends Omit<RefusedMessage, 'at'> {
  readonly count: number
  readonly firstAt: number
  readonly lastAt: number
}

/** What brokers sent that could not be taken, and when messages came first. */
export interface MessageStore {
  /** Counts a refusal; keeps the latest hundred of a site. */
  refuse(site: string, message: RefusedMessage): Promise<void>
  /** Latest first. */
  refused(site: string): Promise<readonly RefusedMessageRecord[]>
  /** Remembers when a message came; one that comes `again` gets the moment it came first, where that is known. */
  arrivedAt(digest: Uint8Array, now: number, again: boolean): Promise<number>
}
