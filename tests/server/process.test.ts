import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { readSettings } from '../../server/settings.ts'
import { buildServer, runServer, startServer, temporaryFolder } from '../faults/server-process.ts'
import { OWNER_KEY } from './harness.ts'

describe('the process', () => {
  const folder = temporaryFolder()
  beforeAll(buildServer)
  afterAll(folder.remove)

  it('makes an owner key at the first start, shows it once, and listens on one line', async () => {
    const data = join(folder.path, 'first')
    const first = await startServer(data, { LEAKTIDE_OWNER_KEY: '' })
    const { output, code } = await first.end('SIGTERM')
    expect(code).toBe(0)
    const key = /lt-owner-[\w-]{43}/.exec(output)?.[0]
    expect(key).toBeDefined()
    expect(output.match(/listening on/g)).toHaveLength(1)

    const second = await startServer(data, { LEAKTIDE_OWNER_KEY: '' })
    const sites = await fetch(`${second.url}/api/sites`, { headers: { authorization: `Bearer ${key}` } })
    expect(sites.status).toBe(200)
    expect((await second.end('SIGINT')).output).not.toContain('lt-owner')
  })

  it('ends in peace while a page listens', async () => {
    const server = await startServer(join(folder.path, 'live'), { LEAKTIDE_OWNER_KEY: OWNER_KEY })
    const headers = { authorization: `Bearer ${OWNER_KEY}`, 'content-type': 'application/json' }
    const body = JSON.stringify({ name: 'Bakery', timeZone: 'Europe/Vienna' })
    const made = await fetch(`${server.url}/api/sites`, { method: 'POST', headers, body })
    const { id } = (await made.json()) as { id: string }
    const stream = await fetch(`${server.url}/api/sites/${id}/live`, { headers })
    const heard = stream.text()
    expect((await server.end('SIGTERM')).code).toBe(0)
    expect(await heard).toContain('listening')
  })

  it('says in one sentence why it cannot start', async () => {
    const ending = await runServer('/dev/null/nowhere')
    expect(ending.code).toBe(1)
    expect(ending.output.trim().split('\n')).toHaveLength(1)
    expect(ending.output).not.toMatch(/^\s+at /m)
  })
})

describe('settings', () => {
  it('have defaults, environment wins over them, flags over both', () => {
    expect(readSettings([], {})).toMatchObject({ verb: 'serve', host: '127.0.0.1', port: 7250, ownerKey: undefined })
    const env = { LEAKTIDE_PORT: '7301', LEAKTIDE_HOST: '0.0.0.0', LEAKTIDE_DATA: 'elsewhere', LEAKTIDE_OWNER_KEY: 'k' }
    const set = readSettings(['serve', '--port', '7302'], env)
    expect(set).toMatchObject({ port: 7302, host: '0.0.0.0', ownerKey: 'k' })
    expect(set.data).toMatch(/elsewhere$/)
    expect(Object.isFrozen(set)).toBe(true)
  })

  it.each([
    [['--prot', '1'], /--prot/],
    [['--port', 'many'], /--port/],
    [['--port', '70000'], /65535/],
    [['--host', 'not a host'], /--host/],
    [['--port'], /--port/],
    [['sevre'], /sevre/],
  ])('like %j are refused in one sentence', (argv, sentence) => {
    expect(() => readSettings(argv, {})).toThrow(sentence)
    expect(() => readSettings(argv, {})).toThrow(expect.objectContaining({ name: 'SettingsError' }))
  })
})
