import { promisify } from 'node:util'
import { gzip as gzipWithCallback } from 'node:zlib'
import type { Simulated } from '../../core/simulate/simulated.ts'

const gzip = promisify(gzipWithCallback)

/** Readings in one body, as a logger that was away for hours would send them. */
const READINGS_PER_BODY = 10_000
/** Records in one body. */
const RECORDS_PER_BODY = 500

/** Where to post, and with whose key. */
export interface Api {
  /** Of the server, without `/api`. */
  readonly url: string
  readonly ownerKey: string
  readonly onProgress?: ((line: string) => void) | undefined
}

interface Block {
  readonly channel: string
  readonly t: readonly number[]
  readonly v: readonly number[]
}

/**
 * Makes the site of a simulation and posts all that was recorded, through the public API alone. Resolves with the site's id once everything
 * is stored. @throws {Error} when the server refuses anything.
 */
export async function postSimulated(api: Api, simulated: Simulated): Promise<string> {
  const { id: site } = (await post(api, '/sites', simulated.sheet)) as { id: string }
  const path = `/sites/${site}`
  const total = [...simulated.series.values()].reduce((sum, series) => sum + series.t.length, 0)
  let sent = 0
  let told = 0
  for (const blocks of bodies(simulated)) {
    const count = blocks.reduce((sum, block) => sum + block.t.length, 0)
    const answer = (await post(api, `${path}/readings`, { blocks })) as { stored: number; refusedCount: number }
    if (answer.refusedCount > 0) throw new Error(`the server refused ${answer.refusedCount} readings`)
    sent += count
    if (sent - told >= total / 4 || sent === total) {
      told = sent
      api.onProgress?.(`posted ${sent.toLocaleString('en')} of ${total.toLocaleString('en')} readings`)
    }
  }
  for (const list of pieces(simulated.switchings, RECORDS_PER_BODY)) {
    await post(api, `${path}/switchings`, { changes: list })
  }
  for (const kind of ['trips', 'timetables', 'tests', 'remedies'] as const) {
    for (const list of pieces<object>(simulated[kind], RECORDS_PER_BODY)) await post(api, `${path}/${kind}`, list)
  }
  return site
}

/** All series, cut into bodies of blocks. */
function* bodies({ series }: Simulated): Generator<Block[]> {
  let body: Block[] = []
  let room = READINGS_PER_BODY
  for (const [channel, { t, v }] of series) {
    for (let i = 0; i < t.length; ) {
      const end = Math.min(t.length, i + room)
      body.push({ channel, t: Array.from(t.subarray(i, end)), v: Array.from(v.subarray(i, end)) })
      room -= end - i
      i = end
      if (room > 0) continue
      yield body
      body = []
      room = READINGS_PER_BODY
    }
  }
  if (body.length > 0) yield body
}

function* pieces<T>(list: readonly T[], size: number): Generator<readonly T[]> {
  for (let i = 0; i < list.length; i += size) yield list.slice(i, i + size)
}

async function post({ url, ownerKey }: Api, path: string, body: unknown): Promise<unknown> {
  const response = await fetch(`${url.replace(/\/$/, '')}/api${path}`, {
    method: 'POST',
    headers: {
      authorization: `Bearer ${ownerKey}`,
      'content-type': 'application/json',
      'content-encoding': 'gzip',
    },
    body: await gzip(JSON.stringify(body), { level: 1 }),
  })
  if (!response.ok) throw new Error(`POST ${path} answered ${response.status}: ${await response.text()}`)
  return response.json()
}
