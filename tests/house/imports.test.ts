import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { importsOf, type Room, whyNot } from './imports.ts'
import { ROOT, sourceOf, sourcesIn } from './sources.ts'

const { dependencies } = JSON.parse(readFileSync(join(ROOT, 'package.json'), 'utf8')) as {
  dependencies: Record<string, string>
}
const packages = Object.keys(dependencies)
const withoutDatabase = packages.filter((name) => name !== 'better-sqlite3')
const withoutDatabaseAndHttp = withoutDatabase.filter((name) => !/fastify/.test(name))
const pure = ['temporal-polyfill', '@stdlib/']

/** Who may know whom. Later rooms lie inside earlier ones and stand for themselves. */
const ROOMS: readonly Room[] = [
  { folder: 'core', may: ['core/', ...pure] },
  { folder: 'core/contract', may: ['core/', 'zod', ...pure] },
  { folder: 'core/simulate', may: ['core/', ...pure] },
  { folder: 'web', may: ['web/', 'core/', 'preact', 'uplot', ...pure], never: ['core/simulate'] },
  { folder: 'web/vite.config.ts', may: ['vite', 'node:*'] },
  {
    folder: 'server',
    may: ['server/', 'core/', 'node:*', ...withoutDatabase],
    never: ['core/simulate', 'server/launch'],
  },
  { folder: 'server/demo', may: ['server/', 'core/', 'node:*', ...withoutDatabase] },
  { folder: 'server/demo.ts', may: ['server/', 'core/', 'node:*', ...withoutDatabase] },
  {
    folder: 'server/routes',
    may: ['server/', 'core/', 'node:*', ...withoutDatabase],
    never: [
      'server/store/sqlite',
      'server/main.ts',
      'server/app.ts',
      'core/simulate',
      'core/findings',
      'core/statistics',
    ],
  },
  {
    folder: 'server/mqtt',
    may: ['server/mqtt', 'server/intake', 'server/store/port.ts', 'core/', 'node:*', 'mqtt', 'zod'],
    never: ['core/simulate'],
  },
  {
    folder: 'server/alerts',
    may: [
      'server/alerts',
      'server/intake/taken.ts',
      'server/store/port.ts',
      'server/store/alert-port.ts',
      'server/analysis/limits.ts',
      'core/',
      'node:*',
      'nodemailer',
      'zod',
      ...pure,
    ],
    never: ['core/simulate', 'core/findings'],
  },
  {
    folder: 'server/intake',
    may: ['server/intake', 'server/store/port.ts', 'core/', 'node:*', ...withoutDatabaseAndHttp],
    never: ['core/simulate'],
  },
  { folder: 'server/store', may: ['server/store', 'core/', 'node:*'], never: ['core/simulate'] },
  {
    folder: 'server/store/sqlite',
    may: ['server/store', 'core/', 'node:*', 'better-sqlite3'],
    never: ['core/simulate'],
  },
  {
    folder: 'server/analysis',
    may: ['server/analysis', 'server/store', 'core/', 'node:*', 'piscina'],
    never: ['core/simulate'],
  },
  {
    folder: 'server/jobs',
    may: ['server/jobs', 'server/store/port.ts', 'server/analysis', 'core/', ...pure],
    never: ['core/simulate', 'node:timers'],
  },
  { folder: 'server/launch', may: ['server/launch', 'node:*'] },
]

const sources = sourcesIn('core', 'server', 'web')

describe('imports', () => {
  it('keep to the table of rooms', () => {
    const wrong = sources.flatMap(importsOf).flatMap((found) => whyNot(ROOMS, found) ?? [])
    expect(wrong).toEqual([])
  })

  it('are seen in every form, with file and line', () => {
    const planted = sourceOf(
      'core/statistics/planted.ts',
      [
        "import { readFile } from 'node:fs'",
        'import {',
        '  deep,',
        "} from '../../server/store/sqlite/open.ts'",
        "export { z } from 'zod'",
        "const later = await import('fastify')",
        "import '../../tests/house/sources.ts'",
        "const worker = new URL('../../server/analysis/worker.ts', import.meta.url)",
        "// import { nothing } from 'console'",
        "import { rate } from './rate.ts'",
      ].join('\n'),
    )
    const wrong = importsOf(planted).flatMap((found) => whyNot(ROOMS, found) ?? [])
    expect(wrong.sort()).toEqual(
      [
        'core/statistics/planted.ts:1 (core) must not import node:fs',
        'core/statistics/planted.ts:2 (core) must not import server/store/sqlite/open.ts',
        'core/statistics/planted.ts:5 (core) must not import zod',
        'core/statistics/planted.ts:6 (core) must not import fastify',
        'core/statistics/planted.ts:7 (core) must not import tests/house/sources.ts',
        'core/statistics/planted.ts:8 (core) must not import server/analysis/worker.ts',
      ].sort(),
    )
  })

  it.each([
    ['web/page.tsx', "import { open } from '../server/main.ts'", 'web/page.tsx:1 (web) must not import server/main.ts'],
    ['server/routes/sites.ts', "import Database from 'better-sqlite3'", 'better-sqlite3'],
    ['server/store/sqlite/open.ts', "import fastify from 'fastify'", 'fastify'],
    ['server/analysis/pool.ts', "import fastify from 'fastify'", 'fastify'],
    ['server/app.ts', "import { bakery } from '../core/simulate/bakery.ts'", 'core/simulate/bakery.ts'],
    ['server/app.ts', "import fc from 'fast-check'", 'fast-check'],
  ])('refuse a planted one in %s', (name, text, target) => {
    const wrong = importsOf(sourceOf(name, text)).flatMap((found) => whyNot(ROOMS, found) ?? [])
    expect(wrong).toEqual([expect.stringContaining(target)])
  })
})
