import Database from 'better-sqlite3'

const WAIT_MS = 5_000

/** Opens the data file for writing: a log that is synced before a call answers, and references that hold. */
export function openForWriting(file: string): Database.Database {
  const db = new Database(file, { timeout: WAIT_MS })
  db.pragma('journal_mode = WAL')
  db.pragma('synchronous = FULL')
  db.pragma('foreign_keys = ON')
  db.pragma('cache_size = -16000')
  db.pragma('journal_size_limit = 67108864')
  return db
}

/** Opens an existing data file for reading only. */
export function openForReading(file: string): Database.Database {
  const db = new Database(file, { timeout: WAIT_MS, readonly: true, fileMustExist: true })
  db.pragma('cache_size = -16000')
  return db
}
