import { describe, expect, it } from 'vitest'
import { findings, sourceOf, sourcesIn } from './sources.ts'

const sources = sourcesIn('core', 'server', 'web')

const SQL =
  /\b(?:SELECT|INSERT (?:OR \w+ )?INTO|DELETE FROM|UPDATE \w+ SET|CREATE (?:TABLE|INDEX|VIEW)|ALTER TABLE|PRAGMA) |\.prepare\(/g

describe('one place for one thing', () => {
  it('SQL stands in server/store/sqlite alone', () => {
    const elsewhere = sources.filter((source) => !source.name.startsWith('server/store/sqlite/'))
    expect(elsewhere.flatMap((source) => findings(source, 'code', SQL))).toEqual([])
  })

  it('the environment is read by server/settings.ts alone, and by the step in front', () => {
    const elsewhere = sources.filter(
      ({ name }) =>
        name !== 'server/settings.ts' && !name.startsWith('server/launch/') && name !== 'web/vite.config.ts',
    )
    expect(elsewhere.flatMap((source) => findings(source, 'bare', /\bprocess\.env\b/g))).toEqual([])
  })

  it('HTML is never set from a string', () => {
    const risky = /\binnerHTML\b|\bouterHTML\b|\binsertAdjacentHTML\b|\bdangerouslySetInnerHTML\b|\bdocument\.write\b/g
    expect(sourcesIn('web').flatMap((source) => findings(source, 'bare', risky))).toEqual([])
  })

  it('SQL is recognised in a planted string, not in a comment', () => {
    const planted = sourceOf('server/app.ts', "// SELECT nothing\nconst found = 'SELECT 1'")
    expect(findings(planted, 'code', SQL)).toEqual(['server/app.ts:2: SELECT'])
  })
})
