import { afterEach, describe, expect, it, vi } from 'vitest'
import { CallError, call, isAbort } from '../../web/api/call.ts'

/** Answers every fetch with a status and a body that breaks as told. */
const answering = (status: number, json: () => Promise<unknown>): void => {
  vi.stubGlobal('fetch', async () => ({ status, ok: status < 400, json }))
}
const broken = async (error: Error): Promise<never> => {
  throw error
}

describe('call', () => {
  afterEach(() => {
    vi.unstubAllGlobals()
  })

  it('is given up, not answered, when the page gives up while the body comes', async () => {
    answering(200, () => broken(new DOMException('gone', 'AbortError')))
    const error = await call('/sites').catch((e: unknown) => e)
    expect(isAbort(error)).toBe(true)
  })

  it('never takes half an answer for an empty one', async () => {
    answering(200, () => broken(new TypeError('network')))
    await expect(call('/sites')).rejects.toBeInstanceOf(CallError)
  })

  it('tells the status of a refusal whose body is no problem document', async () => {
    answering(502, () => broken(new SyntaxError('<html>')))
    await expect(call('/sites')).rejects.toMatchObject({ status: 502 })
  })
})
