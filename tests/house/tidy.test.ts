import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { filesIn, findings, ROOT, type Source, sourcesIn } from './sources.ts'

/** Longest file anybody has to read in one go. Most are far shorter. */
const MOST_LINES = 400

const own = sourcesIn('core', 'server', 'web', 'tests')
const outside = own.filter((source) => !source.name.startsWith('tests/house/'))
const everywhere = (view: 'text' | 'code' | 'bare', pattern: RegExp): string[] =>
  outside.flatMap((source: Source) => findings(source, view, pattern))

describe('tidiness', () => {
  it(`no file is longer than ${MOST_LINES} lines`, () => {
    const long = [
      ...own.map(({ name }) => name),
      ...filesIn(['web', 'migrations']).filter((n) => /\.(css|sql)$/.test(n)),
    ]
      .map((name) => ({ name, lines: readFileSync(join(ROOT, name), 'utf8').split('\n').length - 1 }))
      .filter(({ lines }) => lines > MOST_LINES)
      .map(({ name, lines }) => `${name}: ${lines} lines`)
    expect(long).toEqual([])
  })

  it('no work is left for later, no check is switched off', () => {
    expect(everywhere('text', /\bTODO\b|\bFIXME\b|@ts-(?:ignore|nocheck|expect-error)/g)).toEqual([])
    expect(everywhere('bare', /\b(?:it|test|describe|suite)\.(?:skip|only|todo|fails)\b/g)).toEqual([])
  })

  it('no error is swallowed by an empty catch', () => {
    expect(
      everywhere('text', /\bcatch\s*(?:\([^)]*\)\s*)?\{\s*\}|\.catch\(\s*\(\)\s*=>\s*(?:\{\s*\}|undefined)\s*\)/g),
    ).toEqual([])
  })
})

describe('the repository', () => {
  it('names no folder of the machine it was written on', () => {
    const names = [...filesIn(['core', 'server', 'web', 'tests', '.ci', 'migrations']), 'README.md', 'DEVELOPERS.md']
    const local = names.filter((name) =>
      /(?<![\w.*:])\/(?:home|Users|root|work)\/\w/.test(readFileSync(join(ROOT, name), 'utf8')),
    )
    expect(local).toEqual([])
  })
})

describe('packages', () => {
  const read = (name: string): string => readFileSync(join(ROOT, name), 'utf8')

  it('are named by exact versions', () => {
    const { dependencies, devDependencies } = JSON.parse(read('package.json')) as Record<string, Record<string, string>>
    const loose = Object.entries({ ...dependencies, ...devDependencies }).filter(
      ([, version]) => !/^\d+\.\d+\.\d+(-[\w.]+)?$/.test(version),
    )
    expect(loose).toEqual([])
  })

  it('are locked without the address of any registry', () => {
    expect(read('package-lock.json')).not.toMatch(/"resolved"/)
  })
})

describe('migrations', () => {
  it('are numbered from 0001 without a hole', () => {
    const names = filesIn(['migrations']).map((name) => name.slice('migrations/'.length))
    expect(names).toEqual(
      names.map((_, i) => expect.stringMatching(`^${String(i + 1).padStart(4, '0')}-[a-z0-9-]+\\.sql$`)),
    )
    expect(names.length).toBeGreaterThan(0)
  })
})
