// How soon the page answers on the bakery's week at full readings, how soon its chart follows a zoom, how much script it takes.
import { readdirSync, readFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { gzipSync } from 'node:zlib'
import type { Page } from 'playwright-core'
import { type BakeryServer, startBakery } from '../browser/bakery-server.ts'
import { HAS_BROWSER, openPage, PHONE } from '../browser/browser.ts'
import { buildPage } from '../browser/built-page.ts'
import { type Measure, median } from './harness.ts'

export const name = 'page: the answer and the chart on the bakery'

const ASSETS = fileURLToPath(new URL('../../dist/web/assets', import.meta.url))
const TIMES = 5
const ZOOMS = 7

/** Script size of the built page, the time from opening to the answer (findings to be worked out, then kept), the time of a zoom. */
export async function run(): Promise<Measure[]> {
  await buildPage()
  const scripts = readdirSync(ASSETS).filter((file) => file.endsWith('.js'))
  const kB = scripts.reduce((sum, file) => sum + gzipSync(readFileSync(`${ASSETS}/${file}`)).length / 1_000, 0)
  const size: Measure = { what: 'script, gzipped', value: kB, unit: 'kB', target: '< 120 kB' }
  if (!HAS_BROWSER) return [size]
  const server = await startBakery(1)
  try {
    const { ms: first } = await opening(server)
    const warm: number[] = []
    for (let i = 0; i < TIMES; i++) warm.push((await opening(server)).ms)
    const cold: number[] = []
    for (let i = 0; i < TIMES; i++) {
      await postReading(server, i)
      cold.push((await opening(server)).ms)
    }
    const { zooms } = await opening(server, true)
    const phone = 'phone, 390 px'
    return [
      size,
      { what: `answer visible, the first opening of all, ${phone}`, value: first, unit: 'ms', target: '< 1,500 ms' },
      {
        what: 'answer visible, findings cold (one new reading)',
        value: median(cold),
        unit: 'ms',
        target: '< 1,500 ms',
      },
      { what: 'answer visible, findings kept', value: median(warm), unit: 'ms', target: '< 1,500 ms' },
      { what: 'zoom by a key until the chart is redrawn from what is there', value: zooms.redrawn, unit: 'ms' },
      { what: 'zoom by a key until the exact pixels have come', value: zooms.exact, unit: 'ms' },
    ]
  } finally {
    await server.stop()
  }
}

interface Zooms {
  readonly redrawn: number
  readonly exact: number
}

/** Milliseconds from opening the address to the answer on the screen, in a browser that has seen nothing. */
async function opening(server: BakeryServer, zoom = false): Promise<{ ms: number; zooms: Zooms }> {
  const open = await openPage(PHONE)
  try {
    const began = performance.now()
    await open.page.goto(`${server.url}/#key=${server.ownerKey}`)
    await open.page.getByTestId('answer').waitFor()
    const ms = performance.now() - began
    return { ms, zooms: zoom ? await zoomsOf(open.page) : { redrawn: Number.NaN, exact: Number.NaN } }
  } finally {
    await open.close()
  }
}

/** A reading one second after the last: whatever was worked out before no longer holds. */
async function postReading(server: BakeryServer, i: number): Promise<void> {
  const series = server.week.series.get('tails-a')
  const last = series?.t[series.t.length - 1]
  if (last === undefined) throw new Error('the bakery has no channel tails-a')
  const block = { channel: 'tails-a', t: [last + (i + 1) * 1_000], v: [11] }
  await server.call('POST', `/sites/${server.site}/readings`, { blocks: [block] })
}

/** Medians over some zooms in, measured inside the page: to the next painted frame, and to the end of the fetch with its frame. */
async function zoomsOf(page: Page): Promise<Zooms> {
  await page.locator('.lane-weather canvas').first().waitFor()
  const redrawn: number[] = []
  const exact: number[] = []
  for (let i = 0; i < ZOOMS; i++) {
    const took = await page.evaluate(zoomIn)
    redrawn.push(took.redrawn)
    exact.push(took.exact)
  }
  return { redrawn: median(redrawn), exact: median(exact) }
}

/** Runs in the page. */
async function zoomIn(): Promise<Zooms> {
  const hand = document.querySelector<HTMLElement>('.strip-hand')
  const body = document.querySelector('.strip-body')
  if (hand === null || body === null) throw new Error('there is no strip')
  // methods, since the loader gives named arrow functions a helper that the page does not have
  const wait = {
    painted(): Promise<void> {
      return new Promise((resolve) => {
        requestAnimationFrame(() => setTimeout(resolve))
      })
    },
    busy(): boolean {
      return body.getAttribute('aria-busy') === 'true'
    },
  }
  const began = performance.now()
  hand.dispatchEvent(new KeyboardEvent('keydown', { key: '+', bubbles: true }))
  await wait.painted()
  await wait.painted() // the first frame applies the state, its effects draw before the second
  const redrawn = performance.now() - began
  while (!wait.busy() && performance.now() - began < 1_000) await wait.painted()
  while (wait.busy()) await wait.painted()
  await wait.painted()
  return { redrawn, exact: performance.now() - began }
}
