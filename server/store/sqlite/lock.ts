import Database from 'better-sqlite3'
import { StoreError } from '../port.ts'

/** Long enough for a server that was told to stop a moment ago. */
const PATIENCE_MS = 1_000

/** Claims that hold. Without this an unreachable one would be collected, and its lock be gone while the process lives. */
const held = new Set<Database.Database>()

/**
 * Claims a data file for one writing process. The lock is one of the operating system, held by an open transaction on
 * a small file beside it, so that it ends with the process, whichever way that ends. Returns how to let go.
 * @throws {StoreError} busy
 */
export function claimForWriting(file: string): () => void {
  const lock = new Database(`${file}.lock`, { timeout: PATIENCE_MS })
  try {
    lock.exec('BEGIN EXCLUSIVE')
  } catch (error) {
    lock.close()
    if (!(error instanceof Database.SqliteError) || !error.code.startsWith('SQLITE_BUSY')) throw error
    throw new StoreError('busy', `Another server is already working on ${file}; stop it first.`, { cause: error })
  }
  held.add(lock)
  return () => {
    lock.close()
    held.delete(lock)
  }
}
