// How soon the page answers on the bakery's week at full readings, and how much script it takes.
import { readdirSync, readFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { gzipSync } from 'node:zlib'
import { startBakery } from '../browser/bakery-server.ts'
import { HAS_BROWSER, openPage, PHONE } from '../browser/browser.ts'
import { buildPage } from '../browser/built-page.ts'
import { type Measure, median } from './harness.ts'

export const name = 'page: the answer on the bakery'

const ASSETS = fileURLToPath(new URL('../../dist/web/assets', import.meta.url))
const OPENINGS = 5

/** Script size of the built page, and the time from opening to the answer: first with cold findings, then with kept ones. */
export async function run(): Promise<Measure[]> {
  await buildPage()
  const scripts = readdirSync(ASSETS).filter((file) => file.endsWith('.js'))
  const kB = scripts.reduce((sum, file) => sum + gzipSync(readFileSync(`${ASSETS}/${file}`)).length / 1_000, 0)
  const size: Measure = { what: 'script, gzipped', value: kB, unit: 'kB', target: '< 120' }
  if (!HAS_BROWSER) return [size]
  const server = await startBakery(1)
  try {
    const cold = await opening(server.url, server.ownerKey)
    const warm: number[] = []
    for (let i = 0; i < OPENINGS; i++) warm.push(await opening(server.url, server.ownerKey))
    return [
      size,
      { what: 'answer visible, findings cold', value: cold, unit: 'ms', target: '< 1500' },
      { what: 'answer visible, findings kept, median', value: median(warm), unit: 'ms', target: '< 1500' },
    ]
  } finally {
    await server.stop()
  }
}

/** Milliseconds from opening the address to the answer on the screen, in a browser that has seen nothing. */
async function opening(url: string, key: string): Promise<number> {
  const open = await openPage(PHONE)
  try {
    const began = performance.now()
    await open.page.goto(`${url}/#key=${key}`)
    await open.page.getByTestId('answer').waitFor()
    return performance.now() - began
  } finally {
    await open.close()
  }
}
