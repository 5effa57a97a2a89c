import { gzipSync } from 'node:zlib'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { ReadingsAnswer, Trace } from '../../core/contract/index.ts'
import { type Harness, startHarness } from './harness.ts'

const T0 = 1_790_000_000_000

describe('readings', () => {
  let h: Harness
  let site: string
  beforeAll(async () => {
    h = await startHarness()
  })
  beforeEach(async () => {
    site = await h.makeSite()
  })
  afterAll(() => h.close())

  const post = (body: unknown, query = '', headers: Record<string, string> = {}) =>
    h.call('POST', `/sites/${site}/readings${query}`, body, { headers })
  const block = (t: unknown, v: unknown, channel = 'tails-a') => ({ blocks: [{ channel, t, v }] })
  const stored = async (channel = 'tails-a'): Promise<[number, number][]> => {
    const answer = await h.call('GET', `/sites/${site}/channels/${channel}/readings`, undefined, {
      headers: { accept: 'application/x-ndjson' },
    })
    expect(answer.statusCode).toBe(200)
    return answer.body
      .split('\n')
      .filter((line) => line !== '')
      .map((line) => JSON.parse(line) as { t: number; v: number })
      .map(({ t, v }) => [t, v])
  }

  it('come back exactly as sent, whatever the order', async () => {
    const t = [T0 + 2000, T0, T0 + 1000, new Date(T0 + 3000).toISOString(), '2026-09-21T16:13:24+02:00']
    const v = [0.1 + 0.2, 12.9, 5e-324, 1.7976931348623157e3, 13.1]
    const answer = await post(block(t, v))
    expect(answer.statusCode).toBe(200)
    expect(ReadingsAnswer.parse(answer.json())).toEqual({
      stored: 5,
      repeated: 0,
      conflicting: 0,
      refused: [],
      refusedCount: 0,
    })
    expect(await stored()).toEqual([
      [T0, 12.9],
      [T0 + 1000, 5e-324],
      [T0 + 2000, 0.1 + 0.2],
      [T0 + 3000, 1.7976931348623157e3],
      [T0 + 4000, 13.1],
    ])
  })

  it('are told repeated, conflicting, or replaced', async () => {
    await post(block([T0, T0 + 1000], [1, 2]))
    expect((await post(block([T0, T0 + 1000, T0 + 2000], [1, 9, 3]))).json()).toMatchObject({
      stored: 1,
      repeated: 1,
      conflicting: 1,
    })
    expect(await stored()).toEqual([
      [T0, 1],
      [T0 + 1000, 2],
      [T0 + 2000, 3],
    ])
    expect((await post(block([T0 + 1000], [9]), '?replace=true')).json()).toMatchObject({ stored: 1, conflicting: 0 })
    expect(await stored()).toContainEqual([T0 + 1000, 9])
  })

  it('are refused one by one, their neighbours kept', async () => {
    const t = [T0, 'yesterday', '2026-09-21T02:14:05', 5, T0 + 4000, T0 + 5000, T0 + 6000, T0 + 7000.5]
    const v = [1, 2, 3, 4, null, '6', 99_999, 8]
    const answer = (await post(block(t, v))).json()
    expect(answer).toMatchObject({ stored: 1, refusedCount: 7 })
    expect(answer.refused.map(({ block: b, index }: { block: number; index: number }) => [b, index])).toEqual(
      [1, 2, 3, 4, 5, 6, 7].map((i) => [0, i]),
    )
    expect(answer.refused[1].why).toContain('offset')
    expect(answer.refused[2].why).toContain('2000')
    expect(answer.refused[5].why).toContain('full scale')
  })

  it('that are infinite are refused, and text that says NaN is no JSON', async () => {
    expect((await post(`{"blocks":[{"channel":"tails-a","t":[${T0},${T0 + 1}],"v":[1e999,1]}]}`)).json()).toMatchObject(
      {
        stored: 1,
        refusedCount: 1,
      },
    )
    expect((await post(`{"blocks":[{"channel":"tails-a","t":[${T0}],"v":[NaN]}]}`)).statusCode).toBe(400)
  })

  it('of a running channel are 0 or 1', async () => {
    const answer = await post(block([T0, T0 + 1, T0 + 2, T0 + 3], [0, 1, 0.5, true], 'mixer-runs'))
    expect(answer.json()).toMatchObject({ stored: 2, refusedCount: 2, refused: [{ index: 2 }, { index: 3 }] })
  })

  it('of which none can be taken make a refusal that says so', async () => {
    const answer = await post(block(Array(200).fill('bad'), Array(200).fill(1)))
    expect(answer.statusCode).toBe(422)
    const problem = answer.json()
    expect(problem.detail).toContain('Nothing was stored')
    expect(problem.issues).toHaveLength(20)
    expect(problem.issues[17].path).toBe('/blocks/0/t/17')
    expect(problem.refused).toHaveLength(100)
  })

  it.each([
    ['unequal columns', { blocks: [{ channel: 'tails-a', t: [T0], v: [] }] }, '/blocks/0/v'],
    ['an unknown channel', { blocks: [{ channel: 'nope', t: [T0], v: [1] }] }, '/blocks/0/channel'],
    ['a column that is none', { blocks: [{ channel: 'tails-a', t: T0, v: [1] }] }, '/blocks/0/t'],
    ['no blocks', {}, '/blocks'],
    ['a list', [], ''],
    ['text', '"readings"', ''],
    ['null', 'null', ''],
  ])('with %s are refused as a whole', async (_what, body, path) => {
    const good = { channel: 'rain', t: [T0], v: [1] }
    const withGood = typeof body === 'object' && 'blocks' in body ? { blocks: [...body.blocks, good] } : body
    const answer = await post(withGood)
    expect(answer.statusCode).toBe(422)
    expect(answer.json().issues[0].path).toBe(path)
    expect(answer.json().detail).toContain('Nothing was stored')
    expect(await stored('rain')).toEqual([])
  })

  it('may be none', async () => {
    expect((await post({ blocks: [] })).json()).toMatchObject({ stored: 0, refusedCount: 0 })
    expect((await post(block([], []))).statusCode).toBe(200)
  })

  it('may be packed by gzip or deflate', async () => {
    const body = JSON.stringify(block([T0], [1]))
    expect((await post(gzipSync(body), '', { 'content-encoding': 'gzip' })).json()).toMatchObject({ stored: 1 })
  })

  it('are drawn, with gaps', async () => {
    await post(
      block(
        [0, 1, 2, 3, 60, 61].map((s) => T0 + s * 1000),
        [1, 2, 3, 4, 5, 6],
      ),
    )
    const trace = Trace.parse((await h.call('GET', `/sites/${site}/channels/tails-a/trace`)).json())
    expect(trace).toMatchObject({ exact: true, stored: 6 })
    expect(trace.v).toEqual([1, 2, 3, 4, null, 5, 6])
    expect(trace.t).toHaveLength(7)
    const part = await h.call(
      'GET',
      `/sites/${site}/channels/tails-a/trace?from=${T0 + 1000}&to=${T0 + 3000}&columns=10`,
    )
    expect(part.json()).toMatchObject({ v: [2, 3], stored: 2 })
    expect((await h.call('GET', `/sites/${site}/channels/rain/trace`)).json()).toEqual({
      t: [],
      v: [],
      exact: true,
      stored: 0,
    })
  })

  it.each([
    'columns=9',
    'columns=20001',
    'columns=',
    'columns=1e3',
    'from=',
    'from=2026-09-21',
    'from=2026-09-21T00:00:00Z&to=2026-09-20T00:00:00Z',
  ])('are not drawn with ?%s', async (query) => {
    const answer = await h.call('GET', `/sites/${site}/channels/tails-a/trace?${query}`)
    expect(answer.statusCode).toBe(400)
    expect(answer.json().issues).toHaveLength(1)
  })

  it('take a time in a query whose plus sign nobody escaped', async () => {
    const answer = await h.call('GET', `/sites/${site}/channels/tails-a/trace?from=2026-09-21T02:14:05+02:00`)
    expect(answer.statusCode).toBe(200)
  })

  it('stream as CSV unless NDJSON is asked for', async () => {
    await post(block([T0, T0 + 1], [1.5, -0.25]))
    const path = `/sites/${site}/channels/tails-a/readings`
    const csv = await h.call('GET', path)
    expect(csv.headers['content-type']).toMatch(/^text\/csv/)
    expect(csv.body).toBe('time,value\n2026-09-21T14:13:20Z,1.5\n2026-09-21T14:13:20.001Z,-0.25\n')
    const typeFor = async (accept: string) =>
      (await h.call('GET', path, undefined, { headers: { accept } })).headers['content-type']
    expect(await typeFor('text/csv;q=0.5, application/x-ndjson')).toBe('application/x-ndjson')
    expect(await typeFor('application/*')).toBe('application/x-ndjson')
    expect((await h.call('GET', path, undefined, { headers: { accept: 'image/png' } })).statusCode).toBe(406)
  })

  it('show in the extents of channels', async () => {
    await post(block([T0, T0 + 1000], [1, 2]))
    const { items } = (await h.call('GET', `/sites/${site}/channels`)).json()
    expect(items[0]).toMatchObject({
      ref: 'tails-a',
      count: 2,
      first: '2026-09-21T14:13:20Z',
      last: '2026-09-21T14:13:21Z',
    })
    expect(items[1]).toMatchObject({ ref: 'leak-7', count: 0, first: null, last: null })
  })

  it('of channels nobody knows are not found', async () => {
    for (const what of ['trace', 'readings']) {
      expect((await h.call('GET', `/sites/${site}/channels/nope/${what}`)).statusCode).toBe(404)
    }
  })
})
