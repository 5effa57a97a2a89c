import type Database from 'better-sqlite3'
import { AlertSettings, type MatterKind } from '../../../core/contract/index.ts'
import type {
  AlertSettingsRecord,
  AlertStore,
  Attempt,
  DeliveryRecord,
  MatterChange,
  MatterRecord,
} from '../alert-port.ts'
import type { Act, Page, PageQuery } from '../port.ts'
import { alertStatements, type DeliveryRow, type MatterRow } from './alert-statements.ts'
import { pageLimit, readCursor, writeCursor } from './paging.ts'
import type { Within } from './within.ts'

type Pace = { readonly site: string; readonly channel: string; readonly gapMs: number }

/** Matters, settings and the outbox of alerts. */
export class Alerts implements AlertStore {
  readonly #within: Within
  readonly #sql

  constructor(db: Database.Database, within: Within) {
    this.#within = within
    this.#sql = alertStatements(db)
  }

  async settings(site: string): Promise<AlertSettingsRecord | undefined> {
    return this.#within.read(() => {
      const row = this.#sql.settings.get(this.#within.site(site))
      // Parsed, so that settings kept before a field existed have it.
      return row && { settings: AlertSettings.parse(JSON.parse(row.body)), secret: row.secret, since: row.since }
    })
  }

  async saveSettings(
    site: string,
    { settings, secret }: { readonly settings: AlertSettings; readonly secret: string | null },
    { at, by }: Act,
  ): Promise<void> {
    this.#within.write(() =>
      this.#sql.saveSettings.run(this.#within.site(site), JSON.stringify(settings), secret, at, at, by),
    )
  }

  async sitesWithSettings(): Promise<readonly string[]> {
    return this.#within.read(() => this.#sql.sitesWithSettings.all())
  }

  async mattersSince(site: string, since: number): Promise<readonly MatterRecord[]> {
    return this.#within.read(() => this.#sql.mattersSince.all(this.#within.site(site), since).map(this.#matter))
  }

  async mattersById(site: string, ids: readonly string[]): Promise<readonly MatterRecord[]> {
    return this.#within.read(() =>
      this.#sql.mattersById.all(this.#within.site(site), JSON.stringify(ids)).map(this.#matter),
    )
  }

  async matters(site: string, query: PageQuery & { readonly open?: boolean | undefined }): Promise<Page<MatterRecord>> {
    return this.#within.read(() => {
      const { limit, before } = place(query)
      const open = query.open === undefined ? null : Number(query.open)
      const rows = this.#sql.matters.all(this.#within.site(site), before, open, open, limit + 1)
      return pageOf(rows, limit, this.#matter)
    })
  }

  async openCounts(sites: readonly string[]): Promise<ReadonlyMap<string, number>> {
    return this.#within.read(() => new Map(this.#sql.openCounts.all(JSON.stringify(sites))))
  }

  async change(site: string, { open, close, messages }: MatterChange): Promise<void> {
    this.#within.write(() => {
      const num = this.#within.site(site)
      for (const { id, at } of close) this.#sql.close.run(at, num, id)
      const opened = new Map<string, number>()
      for (const { figures, ...matter } of open) {
        const { changes, lastInsertRowid } = this.#sql.open.run({
          ...matter,
          site: num,
          figures: JSON.stringify(figures),
        })
        if (changes === 1) opened.set(matter.id, Number(lastInsertRowid))
      }
      for (const { id, kind, createdAt, matters, to } of messages) {
        const told = matters.flatMap((matter) => opened.get(matter) ?? [])
        if (told.length === 0 || to.length === 0) continue
        const message = Number(this.#sql.addMessage.run(id, num, kind, createdAt).lastInsertRowid)
        for (const matter of told) this.#sql.addMessageMatter.run(message, matter)
        for (const { way, target } of to) this.#sql.addDelivery.run(message, way, target, createdAt)
      }
    })
  }

  async due(now: number, beyond: number, limit: number): Promise<readonly DeliveryRecord[]> {
    return this.#within.read(() => this.#sql.due.all(now, beyond, limit).map(this.#delivery))
  }

  async attempted(num: number, attempt: Attempt): Promise<void> {
    const { state, at } = attempt
    const [nextAt, error] = attempt.state === 'sent' ? [at, null] : [attempt.nextAt, attempt.error]
    this.#within.write(() => this.#sql.attempted.run(state, nextAt, at, state === 'waiting' ? null : at, error, num))
  }

  async deliveries(site: string, query: PageQuery): Promise<Page<DeliveryRecord>> {
    return this.#within.read(() => {
      const { limit, before } = place(query)
      return pageOf(this.#sql.deliveries.all(this.#within.site(site), before, limit + 1), limit, this.#delivery)
    })
  }

  async forgetAlertsBefore(at: number): Promise<void> {
    this.#within.write(() => {
      this.#sql.forgetMessages.run(at)
      this.#sql.forgetMatters.run(at)
    })
  }

  async paces(): Promise<readonly Pace[]> {
    return this.#within.read(() => this.#sql.paces.all())
  }

  async savePaces(paces: readonly Pace[]): Promise<void> {
    if (paces.length === 0) return
    this.#within.write(() => {
      for (const { site, channel, gapMs } of paces) this.#sql.savePace.run(channel, Math.round(gapMs), site)
    })
  }

  readonly #matter = (row: MatterRow): MatterRecord => {
    const { num, kind, figures, ...rest } = row
    const deliveries = this.#sql.deliveriesOfMatter.all(num)
    return { ...rest, kind: kind as MatterKind, figures: JSON.parse(figures), deliveries }
  }

  readonly #delivery = (row: DeliveryRow): DeliveryRecord => {
    const { messageNum, ...rest } = row
    return { ...rest, matters: this.#sql.mattersOfMessage.all(messageNum) }
  }
}

function place(query: PageQuery): { readonly limit: number; readonly before: number } {
  const [after] = query.after === undefined ? [] : (readCursor(query.after) ?? [])
  return { limit: pageLimit(query.limit), before: typeof after === 'number' ? after : Number.MAX_SAFE_INTEGER }
}

function pageOf<R extends { readonly num: number }, T>(
  rows: readonly R[],
  limit: number,
  write: (row: R) => T,
): Page<T> {
  const kept = rows.slice(0, limit)
  const last = rows.length > limit ? kept.at(-1) : undefined
  return { items: kept.map(write), next: last === undefined ? null : writeCursor([last.num]) }
}
