import Database from 'better-sqlite3'
import { StoreError } from '../port.ts'

/** What an error of the engine means to a caller of the port; anything unknown stays as it is. */
export function translateFault(error: unknown): unknown {
  if (!(error instanceof Database.SqliteError)) return error
  const options = { cause: error }
  const code = error.code
  if (code === 'SQLITE_FULL' || code.startsWith('SQLITE_IOERR')) {
    return new StoreError('disk_full', 'The disk is full or cannot be written; nothing of this was kept.', options)
  }
  if (code.startsWith('SQLITE_CORRUPT') || code === 'SQLITE_NOTADB') {
    return new StoreError('corrupt', 'The data file is damaged; restore it from a backup.', options)
  }
  if (code.startsWith('SQLITE_BUSY') || code.startsWith('SQLITE_LOCKED')) {
    return new StoreError('busy', 'Another program holds the data file; try again when it is done.', options)
  }
  return error
}
