import type { AddressInfo } from 'node:net'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type Harness, OWNER_KEY, startHarness } from './harness.ts'

describe('the live stream', () => {
  let h: Harness
  let site: string
  let url: string
  beforeAll(async () => {
    h = await startHarness()
    await h.app.listen({ host: '127.0.0.1', port: 0 })
    url = `http://127.0.0.1:${(h.app.server.address() as AddressInfo).port}`
    site = await h.makeSite()
  })
  afterAll(() => h.close())

  /** A stream, and what it says up to a mark or its end. */
  async function listen(
    key = OWNER_KEY,
  ): Promise<{ type: string | null; until(mark: string | null): Promise<string> }> {
    const response = await fetch(`${url}/api/sites/${site}/live`, { headers: { authorization: `Bearer ${key}` } })
    const reader = response.body!.pipeThrough(new TextDecoderStream()).getReader()
    let heard = ''
    return {
      type: response.headers.get('content-type'),
      until: async (mark) => {
        while (mark === null || !heard.includes(mark)) {
          const { value, done } = await reader.read()
          if (done) break
          heard += value
        }
        if (mark !== null) await reader.cancel()
        return heard
      },
    }
  }

  it('says what arrived', async () => {
    const stream = await listen()
    expect(stream.type).toBe('text/event-stream')
    await h.call('POST', `/sites/${site}/readings`, {
      blocks: [{ channel: 'tails-a', t: [1790000001000, 1790000000000], v: [1, 2] }],
    })
    await h.call('POST', `/sites/${site}/trips`, { rcd: 'A', at: '2026-09-21T02:14:05Z' })
    await h.call('PATCH', `/sites/${site}`, { name: 'Renamed' })
    const heard = await stream.until('event: sheet')
    expect(heard).toContain(
      'event: readings\ndata: {"channel":"tails-a","from":1790000000000,"to":1790000001000,"stored":2}\n\n',
    )
    expect(heard).toContain('event: records\ndata: {"kind":"trip"}\n\n')
  })

  it('says nothing of other sites', async () => {
    const other = await h.makeSite()
    const stream = await listen()
    await h.call('POST', `/sites/${other}/trips`, { rcd: 'A', at: '2026-09-21T02:14:05Z' })
    await h.call('PATCH', `/sites/${site}`, { name: 'Again' })
    expect(await stream.until('event: sheet')).not.toContain('records')
  })

  it('ends with its key, and with its site', async () => {
    const { id, key } = await h.makeKey(site, 'viewer')
    const viewing = await listen(key)
    const owning = await listen()
    await h.call('DELETE', `/sites/${site}/keys/${id}`)
    expect(await viewing.until(null)).toContain('listening')
    await h.call('DELETE', `/sites/${site}`)
    expect(await owning.until(null)).toContain('listening')
    site = await h.makeSite()
  })

  it('does not hold up the end of the server', async () => {
    const stream = await listen()
    const ended = stream.until(null)
    await h.app.close()
    expect(await ended).toContain('listening')
  })
})
