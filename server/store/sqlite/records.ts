import { randomBytes } from 'node:crypto'
import type Database from 'better-sqlite3'
import type { RecordBodies, RecordKind } from '../../../core/contract/index.ts'
import type { Act, CorrectionRecord, KeepReport, Page, PageQuery, StoredRecord } from '../port.ts'
import { canonicalJson, contentHash } from './canonical.ts'
import { pageLimit, readCursor, writeCursor } from './paging.ts'
import { recordSpan } from './record-span.ts'

/** Stands for no bound: further out than any time of a record. */
const NO_BOUND = 2 ** 52

interface RecordRow {
  readonly id: string
  readonly t_from: number
  readonly body: string
  readonly recorded_at: number
  readonly recorded_by: string
  readonly corrections: number
}

type Span = { readonly from?: number | undefined; readonly to?: number | undefined }

const COLUMNS = 'id, t_from, body, recorded_at, recorded_by, corrections'

/** Trips, switchings, timetables, tests and remedies, with what they were before. The caller holds the transaction. */
export class Records {
  readonly #page
  readonly #one
  readonly #insert
  readonly #update
  readonly #delete
  readonly #byHash
  readonly #addHash
  readonly #history
  readonly #remember

  constructor(db: Database.Database) {
    this.#page = db.prepare<[number, string, number, number, number, number, string, number], RecordRow>(
      `SELECT ${COLUMNS} FROM record
       WHERE site = ? AND kind = ? AND t_from >= ? AND t_from < ? AND t_to >= ? AND (t_from, id) > (?, ?)
       ORDER BY t_from, id LIMIT ?`,
    )
    this.#one = db.prepare<[string, number, string], RecordRow>(
      `SELECT ${COLUMNS} FROM record WHERE id = ? AND site = ? AND kind = ?`,
    )
    this.#insert = db.prepare(
      `INSERT INTO record (id, site, kind, t_from, t_to, body, recorded_at, recorded_by) VALUES (?, ?, ?, ?, ?, ?, ?, ?)`,
    )
    this.#update = db.prepare(
      'UPDATE record SET t_from = ?, t_to = ?, body = ?, corrections = corrections + 1 WHERE id = ?',
    )
    this.#delete = db.prepare('DELETE FROM record WHERE id = ?')
    this.#byHash = db
      .prepare<[number, string, Buffer], string>(
        'SELECT record FROM record_key WHERE site = ? AND kind = ? AND hash = ?',
      )
      .pluck()
    this.#addHash = db.prepare(
      'INSERT INTO record_key (site, kind, hash, record) VALUES (?, ?, ?, ?) ON CONFLICT DO NOTHING',
    )
    this.#history = db.prepare<
      [number, string, string],
      { at: number; by: string; action: 'changed' | 'deleted'; before: string }
    >('SELECT at, by, action, before FROM record_history WHERE site = ? AND kind = ? AND record = ? ORDER BY num')
    this.#remember = db.prepare(
      'INSERT INTO record_history (site, kind, record, at, by, action, before) VALUES (?, ?, ?, ?, ?, ?, ?)',
    )
  }

  page<K extends RecordKind>(site: number, kind: K, query: PageQuery & Span): Page<StoredRecord<K>> {
    const from = query.from ?? -NO_BOUND
    const to = query.to ?? NO_BOUND
    // Trips and timetables may begin before the span and reach into it; the others are instants.
    const earliest = kind === 'trip' || kind === 'timetable' ? -NO_BOUND : from
    const [afterTime, afterId] = query.after === undefined ? [] : (readCursor(query.after) ?? [])
    const limit = pageLimit(query.limit)
    const rows = this.#page.all(
      site,
      kind,
      earliest,
      to,
      from,
      typeof afterTime === 'number' ? afterTime : -NO_BOUND,
      typeof afterId === 'string' ? afterId : '',
      limit + 1,
    )
    const items = rows.slice(0, limit)
    const last = rows.length > limit ? items.at(-1) : undefined
    return {
      items: items.map((row) => recordOf(kind, row)),
      next: last === undefined ? null : writeCursor([last.t_from, last.id]),
    }
  }

  one<K extends RecordKind>(site: number, kind: K, id: string): StoredRecord<K> | undefined {
    const row = this.#one.get(id, site, kind)
    return row === undefined ? undefined : recordOf(kind, row)
  }

  keep<K extends RecordKind>(site: number, kind: K, bodies: readonly RecordBodies[K][], act: Act): KeepReport {
    let stored = 0
    const ids: string[] = []
    for (const body of bodies) {
      const hash = contentHash(body)
      let id = this.#byHash.get(site, kind, hash)
      if (id === undefined) {
        id = randomBytes(10).toString('hex')
        const span = recordSpan(kind, body)
        this.#insert.run(id, site, kind, span.from, span.to, canonicalJson(body), act.at, act.by)
        this.#addHash.run(site, kind, hash, id)
        stored++
      }
      ids.push(id)
    }
    return { stored, repeated: bodies.length - stored, ids }
  }

  /** True when something changed; a body equal to the present one changes nothing. */
  correct<K extends RecordKind>(site: number, kind: K, id: string, body: RecordBodies[K], act: Act): boolean {
    const before = this.#one.get(id, site, kind)
    const text = canonicalJson(body)
    if (before === undefined || before.body === text) return false
    const span = recordSpan(kind, body)
    this.#remember.run(site, kind, id, act.at, act.by, 'changed', before.body)
    this.#update.run(span.from, span.to, text, id)
    this.#addHash.run(site, kind, contentHash(body), id)
    return true
  }

  /** True when there was such a record. Its keys go with it: the same body may be posted anew. */
  remove(site: number, kind: RecordKind, id: string, act: Act): boolean {
    const before = this.#one.get(id, site, kind)
    if (before === undefined) return false
    this.#remember.run(site, kind, id, act.at, act.by, 'deleted', before.body)
    this.#delete.run(id)
    return true
  }

  history(site: number, kind: RecordKind, id: string): CorrectionRecord[] {
    return this.#history.all(site, kind, id).map((row) => ({ ...row, before: JSON.parse(row.before) }))
  }
}

function recordOf<K extends RecordKind>(kind: K, row: RecordRow): StoredRecord<K> {
  return {
    id: row.id,
    kind,
    body: JSON.parse(row.body),
    recordedAt: row.recorded_at,
    recordedBy: row.recorded_by,
    corrections: row.corrections,
  }
}
