import { randomBytes } from 'node:crypto'
import type Database from 'better-sqlite3'
import type { SiteSheet } from '../../../core/contract/index.ts'
import { type Act, type Page, type PageQuery, type SiteRecord, StoreError } from '../port.ts'
import type { Channels } from './channels.ts'
import { pageLimit, readCursor, writeCursor } from './paging.ts'

interface SiteRow {
  readonly num: number
  readonly id: string
  readonly created_at: number
  readonly updated_at: number
  readonly revision: number
  readonly body: string
}

const SELECT = `SELECT site.num, id, created_at, updated_at, revision, body FROM site JOIN sheet ON sheet.site = site.num`

/** Sites and their sheets. The caller holds the transaction. */
export class Sites {
  readonly #channels: Channels
  readonly #byId
  readonly #num
  readonly #page
  readonly #insert
  readonly #insertSheet
  readonly #update
  readonly #updateSheet
  readonly #remember
  readonly #delete
  readonly #bump

  constructor(db: Database.Database, channels: Channels) {
    this.#channels = channels
    this.#byId = db.prepare<[string], SiteRow>(`${SELECT} WHERE id = ?`)
    this.#num = db.prepare<[string], number>('SELECT num FROM site WHERE id = ?').pluck()
    this.#page = db.prepare<[number, string, number], SiteRow>(
      `${SELECT} WHERE site.num > ? AND folded_name LIKE ? ESCAPE '\\' ORDER BY site.num LIMIT ?`,
    )
    this.#insert = db.prepare(
      'INSERT INTO site (id, folded_name, created_at, updated_at, revision) VALUES (?, ?, ?, ?, 1)',
    )
    this.#insertSheet = db.prepare('INSERT INTO sheet (site, body) VALUES (?, ?)')
    this.#update = db.prepare('UPDATE site SET folded_name = ?, updated_at = ? WHERE num = ?')
    this.#updateSheet = db.prepare('UPDATE sheet SET body = ? WHERE site = ?')
    this.#remember = db.prepare(
      'INSERT INTO sheet_history (site, at, by, before) SELECT site, ?, ?, body FROM sheet WHERE site = ?',
    )
    this.#delete = db.prepare('DELETE FROM site WHERE num = ?')
    this.#bump = db.prepare('UPDATE site SET revision = revision + 1 WHERE num = ?')
  }

  /** The number of a site. @throws {StoreError} no_such_site */
  need(id: string): number {
    const num = this.#num.get(id)
    if (num === undefined) throw new StoreError('no_such_site', `There is no site "${id}".`)
    return num
  }

  numOf(id: string): number | undefined {
    return this.#num.get(id)
  }

  one(id: string): SiteRecord | undefined {
    const row = this.#byId.get(id)
    return row === undefined ? undefined : this.#recordOf(row)
  }

  page(query: PageQuery & { readonly search?: string | undefined }): Page<SiteRecord> {
    const [after] = query.after === undefined ? [] : (readCursor(query.after) ?? [])
    const limit = pageLimit(query.limit)
    const pattern = `%${fold(query.search ?? '').replace(/[\\%_]/g, '\\$&')}%`
    const rows = this.#page.all(typeof after === 'number' ? after : 0, pattern, limit + 1)
    const items = rows.slice(0, limit)
    const last = rows.length > limit ? items.at(-1) : undefined
    return { items: items.map((row) => this.#recordOf(row)), next: last === undefined ? null : writeCursor([last.num]) }
  }

  create(sheet: SiteSheet, act: Act): SiteRecord {
    const id = randomBytes(8).toString('hex')
    const num = Number(this.#insert.run(id, fold(sheet.name), act.at, act.at).lastInsertRowid)
    this.#insertSheet.run(num, JSON.stringify(sheet))
    this.#listChannels(num, sheet)
    return this.one(id)!
  }

  update(id: string, sheet: SiteSheet, act: Act): SiteRecord {
    const num = this.need(id)
    this.#remember.run(act.at, act.by, num)
    this.#updateSheet.run(JSON.stringify(sheet), num)
    this.#update.run(fold(sheet.name), act.at, num)
    this.#listChannels(num, sheet)
    this.bump(num)
    return this.one(id)!
  }

  /** Removes the site and what refers to it; readings are removed before by whoever keeps them. */
  remove(num: number): void {
    this.#delete.run(num)
  }

  /** Says that something of the site changed. */
  bump(num: number): void {
    this.#bump.run(num)
  }

  #listChannels(num: number, sheet: SiteSheet): void {
    this.#channels.setListed(
      num,
      sheet.channels.map((channel) => channel.ref),
    )
  }

  #recordOf(row: SiteRow): SiteRecord {
    return {
      id: row.id,
      sheet: JSON.parse(row.body),
      createdAt: row.created_at,
      updatedAt: row.updated_at,
      revision: row.revision,
      lastReadingAt: this.#channels.lastReading(row.num),
    }
  }
}

function fold(text: string): string {
  return text.normalize('NFC').toLowerCase()
}
