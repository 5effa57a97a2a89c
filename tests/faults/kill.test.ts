import { setTimeout as sleep } from 'node:timers/promises'
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { BAKEHOUSE, seeded } from './bakehouse.ts'
import { Client } from './client.ts'
import { Ledger } from './ledger.ts'
import { buildServer, runServer, type ServerProcess, startServer, temporaryFolder } from './server-process.ts'

const ROUNDS = 6
const SEED = 20260921

beforeAll(buildServer)

describe('a server that is killed while loggers post', () => {
  const folder = temporaryFolder()
  afterAll(folder.remove)

  it('keeps all it answered, each once, and takes repeats for repeats', async () => {
    const random = seeded(SEED)
    let server = await startServer(folder.path)
    const ledger = new Ledger(await makeSite(server), SEED)
    const repeats: { readonly whole: boolean; readonly again: boolean }[] = []
    for (let round = 0; round < ROUNDS; round++) {
      const posting = ledger.postUntilBroken(server.url)
      await sleep(100 + random() * 400)
      const ending = await server.end('SIGKILL')
      expect(ending.signal).toBe('SIGKILL')
      await posting
      server = await startServer(folder.path)
      repeats.push(...(await ledger.repeatUnanswered(server.url)))
    }
    try {
      expect(repeats.filter(({ whole, again }) => !whole || !again)).toEqual([])
      expect(repeats.length).toBeGreaterThan(0)
      expect(ledger.answered.length).toBeGreaterThan(ROUNDS)
      await expectExactly(server, ledger)
    } finally {
      await server.end('SIGTERM')
    }
  }, 60_000)
})

describe('a server that is told to stop', () => {
  const folder = temporaryFolder()
  let server: ServerProcess
  beforeEach(async () => {
    server = await startServer(folder.path)
  })
  afterEach(async () => {
    await server.end('SIGKILL')
  })
  afterAll(folder.remove)

  it.each([
    ['SIGTERM', 1],
    ['SIGINT', 1],
    ['SIGINT', 2], // Ctrl-C below npm: the terminal sends it, and npm sends it on
  ] as const)(
    'by %s, %i times, finishes what is in flight, ends with 0 and keeps it',
    async (signal, times) => {
      const ledger = new Ledger(await makeSite(server), SEED + 1)
      const posting = ledger.postUntilBroken(server.url)
      await sleep(150)
      const ending = await server.end(signal, times)
      await posting
      expect(ending).toMatchObject({ code: 0, signal: null })
      expect(ledger.answered.length).toBeGreaterThan(0)
      server = await startServer(folder.path)
      const repeats = await ledger.repeatUnanswered(server.url)
      expect(repeats.filter(({ whole, again }) => !whole || !again)).toEqual([])
      await expectExactly(server, ledger)
    },
    30_000,
  )

  it('leaves its data folder to no second server meanwhile', async () => {
    const second = await runServer(folder.path)
    expect(second.code).toBe(1)
    expect(second.output).toContain('Another server is already working on')
    expect(second.output).not.toMatch(/^\s+at /m)
    expect(await new Client(server.url).get('/sites')).toHaveProperty('items')
  }, 30_000)
})

async function makeSite(server: ServerProcess): Promise<string> {
  const made = await new Client(server.url).post<{ id: string }>('/sites', BAKEHOUSE)
  expect(made?.status).toBe(201)
  return made!.body.id
}

async function expectExactly(server: ServerProcess, ledger: Ledger): Promise<void> {
  const client = new Client(server.url)
  for (const channel of ['tails-a', 'leak-7']) {
    expect(await client.readings(ledger.site, channel)).toEqual(ledger.expected(channel))
  }
  const trips = await client.list<{ note: string }>(`/sites/${ledger.site}/trips`)
  const notes = (list: readonly { note: string }[]): string[] => list.map(({ note }) => note).sort()
  expect(notes(trips)).toEqual(notes(ledger.answeredTrips))
}
