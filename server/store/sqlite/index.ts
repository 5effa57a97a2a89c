import type { Store, StoreReader } from '../port.ts'
import { openForReading, openForWriting } from './connection.ts'
import { translateFault } from './faults.ts'
import { claimForWriting } from './lock.ts'
import { checkSchema, migrate, migrationsFolder } from './migrate.ts'
import { SqliteReader } from './reader.ts'
import { SqliteStore } from './store.ts'

/** What tests change: the folder of migrations and the size at which the disk counts as full. */
export interface OpenOptions {
  readonly migrations?: string
  /** Pages of 4,096 bytes. */
  readonly maxPages?: number
}

/**
 * Opens the data file for the one process that writes, makes it when there is none, and brings its schema up to date.
 * @throws {StoreError} busy (another process has it), newer_schema, changed_migration, disk_full, corrupt
 */
export async function openStore(file: string, options: OpenOptions = {}): Promise<Store> {
  const letGo = claimForWriting(file)
  try {
    const db = openForWriting(file)
    try {
      migrate(db, options.migrations ?? migrationsFolder())
      if (options.maxPages !== undefined) db.pragma(`max_page_count = ${Math.floor(options.maxPages)}`)
      return new SqliteStore(db, letGo)
    } catch (error) {
      db.close()
      throw error
    }
  } catch (error) {
    letGo()
    throw translateFault(error)
  }
}

/**
 * Opens the data file for reading on a connection of its own, beside the writing process.
 * @throws {StoreError} newer_schema, changed_migration, corrupt
 */
export async function openReader(file: string): Promise<StoreReader> {
  try {
    const db = openForReading(file)
    try {
      checkSchema(db, migrationsFolder())
      return new SqliteReader(db)
    } catch (error) {
      db.close()
      throw error
    }
  } catch (error) {
    throw translateFault(error)
  }
}
