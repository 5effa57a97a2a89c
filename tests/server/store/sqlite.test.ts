import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, describe } from 'vitest'
import { openStore } from '../../../server/store/sqlite/index.ts'
import { alertsSuite } from './alerts-suite.ts'
import { portSuite } from './port-suite.ts'
import { recordsSuite } from './records-suite.ts'

describe('the store on SQLite', () => {
  const folder = mkdtempSync(join(tmpdir(), 'leaktide-store-'))
  afterAll(() => rmSync(folder, { recursive: true, force: true }))
  portSuite(() => openStore(join(folder, 'data.db')))
  alertsSuite(() => openStore(join(folder, 'alerts.db')))
  recordsSuite(() => openStore(join(folder, 'records.db')))
})
