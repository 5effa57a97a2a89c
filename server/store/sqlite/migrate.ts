import { createHash } from 'node:crypto'
import { existsSync, readdirSync, readFileSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'
import type Database from 'better-sqlite3'
import { StoreError } from '../port.ts'

interface Migration {
  readonly version: number
  readonly name: string
  readonly sql: string
  readonly checksum: string
}

/** The project's migrations: the folder beside the package.json above this file, from source and from dist alike. */
export function migrationsFolder(): string {
  let folder = dirname(fileURLToPath(import.meta.url))
  while (!existsSync(join(folder, 'package.json'))) {
    const above = dirname(folder)
    if (above === folder) throw new Error('no package.json above the store: where are the migrations?')
    folder = above
  }
  return join(folder, 'migrations')
}

function readMigrations(folder: string): readonly Migration[] {
  return readdirSync(folder)
    .filter((name) => /^\d{4}-.*\.sql$/.test(name))
    .sort()
    .map((name) => {
      // A checkout with other line ends is the same migration.
      const sql = readFileSync(join(folder, name), 'utf8').replaceAll('\r\n', '\n')
      return { version: Number(name.slice(0, 4)), name, sql, checksum: createHash('sha256').update(sql).digest('hex') }
    })
}

/** @throws {StoreError} newer_schema, changed_migration when what was applied is not what the program knows */
function checkApplied(db: Database.Database, migrations: readonly Migration[]): ReadonlySet<number> {
  const applied = db
    .prepare<[], { version: number; name: string; checksum: string }>('SELECT version, name, checksum FROM migration')
    .all()
  const known = new Map(migrations.map((m) => [m.version, m]))
  for (const row of applied) {
    const migration = known.get(row.version)
    if (migration === undefined) {
      throw new StoreError(
        'newer_schema',
        `The data were last written by a newer version of the program (migration ${row.name}); start that one.`,
      )
    }
    if (migration.checksum !== row.checksum) {
      throw new StoreError(
        'changed_migration',
        `The migration ${row.name} is not the one these data were made with; put the original file back.`,
      )
    }
  }
  return new Set(applied.map((row) => row.version))
}

/** Refuses data that this program does not know, without changing them. @throws {StoreError} as `migrate` */
export function checkSchema(db: Database.Database, folder: string): void {
  checkApplied(db, readMigrations(folder))
}

/**
 * Brings the schema up to date: each new migration in one transaction, recorded with its checksum.
 * @throws {StoreError} newer_schema, changed_migration
 */
export function migrate(db: Database.Database, folder: string): void {
  const migrations = readMigrations(folder)
  db.exec(`CREATE TABLE IF NOT EXISTS migration (
    version INTEGER PRIMARY KEY, name TEXT NOT NULL, checksum TEXT NOT NULL, applied_at INTEGER NOT NULL) STRICT`)
  const done = checkApplied(db, migrations)
  const record = db.prepare('INSERT INTO migration (version, name, checksum, applied_at) VALUES (?, ?, ?, ?)')
  for (const migration of migrations) {
    if (done.has(migration.version)) continue
    db.transaction(() => {
      db.exec(migration.sql)
      record.run(migration.version, migration.name, migration.checksum, Date.now())
    }).immediate()
  }
}
