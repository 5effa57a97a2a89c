import { execFile } from 'node:child_process'
import { existsSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { promisify } from 'node:util'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { buildServer, type ServerProcess, startServer, temporaryFolder } from '../faults/server-process.ts'
import { filesIn, ROOT } from './sources.ts'

const read = (name: string): string => readFileSync(join(ROOT, name), 'utf8')
const readme = read('README.md')
const developers = read('DEVELOPERS.md')

describe('the documents', () => {
  it('name folders, files and scripts that exist', () => {
    const { scripts } = JSON.parse(read('package.json')) as { scripts: Record<string, string> }
    const paths = [...developers.matchAll(/`((?:core|server|web|tests|migrations|fixtures|\.ci)\/[\w./-]*)`/g)].map(
      (m) => m[1]!,
    )
    const links = [...(readme + developers).matchAll(/\]\((?!http)([^)#]+)\)/g)].map((m) => m[1]!)
    expect([...paths, ...links].filter((path) => !existsSync(join(ROOT, path)))).toEqual([])
    const named = [...(readme + developers).matchAll(/\bnpm run ([a-z]+)/g)].map((m) => m[1]!)
    expect(named.filter((name) => !(name in scripts))).toEqual([])
  })

  it('name the settings that the server reads, all of them', () => {
    const names = (text: string): string[] => [...new Set(text.match(/\bLEAKTIDE_[A-Z_]+\b/g))].sort()
    expect(names(readme)).toEqual(names(read('server/settings.ts')))
  })

  it('give origin and licence of everything in fixtures', () => {
    const table = read('fixtures/README.md')
    const entries = new Set(filesIn(['fixtures']).map((name) => name.split('/').slice(1, 2).join('/')))
    expect([...entries].filter((entry) => entry !== 'README.md' && !table.includes(`\`${entry}`))).toEqual([])
  })
})

describe('the first site of the README', () => {
  const folder = temporaryFolder()
  let server: ServerProcess | undefined

  beforeAll(async () => {
    await buildServer()
    server = await startServer(join(folder.path, 'data'), { LEAKTIDE_OWNER_KEY: ownerKey() })
  })
  afterAll(async () => {
    await server?.end('SIGTERM')
    folder.remove()
  })

  it('comes up when its commands are pasted', async () => {
    const [start, ...commands] = blocks('A first site in five minutes')
    expect(start).toContain('npm start')
    const script = commands.join('\necho\n').replaceAll('http://127.0.0.1:7250', server!.url.replace(/\/$/, ''))
    const { stdout } = await promisify(execFile)('bash', ['-euo', 'pipefail', '-c', script], { cwd: folder.path })
    const answers = stdout.split('\n').filter((line) => line !== '')
    const [site, key, readings, trip, findings] = answers.map((line) => JSON.parse(line) as Record<string, unknown>)
    expect(site).toMatchObject({ name: 'Village bakery' })
    expect(key).toMatchObject({ role: 'logger' })
    expect(readings).toMatchObject({ stored: 5, repeated: 0, conflicting: 0, refused: [] })
    expect(trip).toMatchObject({ stored: 1 })
    expect(findings).toMatchObject({ rcd: 'A', coverage: { trips: 1 } })
  })
})

/** The key that the README's own command sets. */
function ownerKey(): string {
  return /LEAKTIDE_OWNER_KEY=(\S+) npm start/.exec(readme)?.[1] ?? ''
}

/** The indented blocks of a section, without their indent. */
function blocks(title: string): string[] {
  const section = readme.split(/^## /m).find((part) => part.startsWith(title)) ?? ''
  return section
    .split(/\n(?=\S)/)
    .flatMap((part) => part.match(/(?:^ {4}.*\n?|^\n(?= {4}))+/gm) ?? [])
    .map((block) => block.replace(/^ {4}/gm, '').trim())
}
