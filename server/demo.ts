import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { makeSecret } from './plugins/callers.ts'
import { type Serving, serve } from './serve.ts'
import type { Settings } from './settings.ts'

/** Posts the example site with its week through the API of a running server. */
export type PostDemo = (options: {
  readonly url: string
  readonly ownerKey: string
  readonly startMs: number
  readonly onProgress?: (line: string) => void
}) => Promise<{ readonly site: string }>

const DAY_MS = 86_400_000

/**
 * Serves a throw-away data folder that holds an example site with one recorded week, posted through the API itself;
 * the week ended last midnight (UTC). `stop` ends the server and removes the folder.
 */
export async function demo(
  { host, port, ownerKey = makeSecret('owner') }: Settings,
  postDemo: PostDemo,
  say: (line: string) => void,
): Promise<Pick<Serving, 'stop'>> {
  const data = mkdtempSync(join(tmpdir(), 'leaktide-demo-'))
  process.on('exit', () => rmSync(data, { recursive: true, force: true }))
  const { url, stop } = await serve({ data, host, port, ownerKey })
  const startMs = (Math.floor(Date.now() / DAY_MS) - 7) * DAY_MS
  const { site } = await postDemo({ url, ownerKey, startMs, onProgress: say })
  say(`listening on ${url}`)
  say(`open ${url}/sites/${site}#key=${encodeURIComponent(ownerKey)}`)
  return { stop }
}
