import type { Request } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type BakeryServer, startBakery } from './bakery-server.ts'
import { DESKTOP, HAS_BROWSER, type OpenPage, openPage, shoot } from './browser.ts'
import { buildPage } from './built-page.ts'
import { drawnPixels } from './strip-pixels.ts'

describe.runIf(HAS_BROWSER)('the sheet', () => {
  let server: BakeryServer
  let open: OpenPage

  beforeAll(async () => {
    await buildPage()
    server = await startBakery()
    open = await openPage({ ...DESKTOP, colorScheme: 'light', timezoneId: 'America/Chicago' })
    await open.page.goto(`${server.url}/#key=${server.ownerKey}`)
    await open.page.getByTestId('answer').waitFor()
  }, 120_000)
  afterAll(async () => {
    await open?.close()
    await server?.stop()
  })

  /** Does something and gives the trace request of the leakage channel that follows. */
  const traceAfter = async (act: () => Promise<unknown>): Promise<URLSearchParams> => {
    const asked = open.page.waitForRequest((request: Request) => request.url().includes('/channels/tails-a/trace'))
    await act()
    return new URL((await asked).url()).searchParams
  }
  const spanOf = (query: URLSearchParams): number => Date.parse(query.get('to')!) - Date.parse(query.get('from')!)
  const hand = () => open.page.getByRole('application')

  it('opens the only site at once and takes the key out of the address', () => {
    expect(new URL(open.page.url()).pathname).toBe(`/sites/${server.site}`)
    expect(open.page.url()).not.toContain('key')
  })

  it('shows the answer that the API gives', async () => {
    const findings = await server.call<{ answer: { text: string } }>('GET', `/sites/${server.site}/rcds/A/findings`)
    expect(await open.page.getByTestId('answer').textContent()).toBe(findings.answer.text)
  })

  it('draws the trace, a lane for each circuit and load, and a flag for each trip', async () => {
    const rcd = server.week.sheet.rcds[0]!
    const things = rcd.circuits.length + rcd.circuits.flatMap((circuit) => circuit.loads).length
    await open.page.locator('.lane-circuit .lane-canvas').first().waitFor()
    await open.page.locator('.lane-weather .lane-canvas').first().waitFor()
    const drawn = await drawnPixels(open.page)
    expect(drawn.trace).toBeGreaterThan(500)
    expect(drawn.lanes).toBeGreaterThanOrEqual(things)
    const trips = await server.call<{ trips: unknown[] }>('GET', `/sites/${server.site}/rcds/A/findings`)
    expect(await open.page.locator('.flag').count()).toBe(trips.trips.length)
    await shoot(open.page, 'sheet-desktop-light')
  })

  it('says times in the zone of the site, wherever the browser is', async () => {
    expect(await open.page.locator('.whose').textContent()).toContain('Europe/Vienna')
    expect(await open.page.locator('.strip-controls').textContent()).toContain('Mon 21 Sept, 00:00')
  })

  it('asks for exactly as many columns as it has pixels when the wheel zooms', async () => {
    const box = (await hand().boundingBox())!
    await open.page.mouse.move(box.x + box.width / 2, box.y + 40)
    const query = await traceAfter(() => open.page.mouse.wheel(0, -300))
    expect(Number(query.get('columns'))).toBe(Math.round(box.width))
    expect(spanOf(query)).toBeLessThan(7 * 86_400_000)
  })

  it('zooms to what a drag marks', async () => {
    await traceAfter(() => hand().press('Home'))
    const box = (await hand().boundingBox())!
    const query = await traceAfter(async () => {
      await open.page.mouse.move(box.x + box.width * 0.25, box.y + 50)
      await open.page.mouse.down()
      await open.page.mouse.move(box.x + box.width * 0.4, box.y + 50)
      await open.page.mouse.move(box.x + box.width * 0.5, box.y + 50)
      await open.page.mouse.up()
    })
    // A quarter of the week, within what two pixels cover.
    const week = 7 * 86_400_000
    expect(Math.abs(spanOf(query) - week / 4)).toBeLessThan((2 * week) / box.width)
  })

  it('zooms, moves and goes back by keyboard', async () => {
    await hand().focus()
    await traceAfter(() => hand().press('Home'))
    const near = await traceAfter(() => hand().press('+'))
    expect(spanOf(near)).toBeLessThan(0.7 * 7 * 86_400_000)
    const later = await traceAfter(() => hand().press('ArrowRight'))
    expect(Date.parse(later.get('from')!)).toBeGreaterThan(Date.parse(near.get('from')!))
    expect(spanOf(later)).toBe(spanOf(near))
    const back = await traceAfter(() => hand().press('Home'))
    expect(spanOf(back)).toBeGreaterThan(6.9 * 86_400_000)
  })

  it('reads everything at the cursor in words', async () => {
    await hand().press('Shift+ArrowRight')
    await expect.poll(() => open.page.locator('.readout').textContent()).toMatch(/leakage [\d.]+.mA|no leakage reading/)
  })

  it('shows what remains when a part is taken out', async () => {
    const before = await open.page.locator('.remains').textContent()
    await open.page.locator('.parts input').first().uncheck()
    await expect.poll(() => open.page.locator('.remains').textContent()).not.toBe(before)
    expect(await open.page.locator('.remains').textContent()).toMatch(/remains, \d+.% of the trip current/)
    await open.page.locator('.parts input').first().check()
  })

  it('shows a trip of the table on the strip', async () => {
    const query = await traceAfter(() => open.page.getByRole('button', { name: 'Show trip 1 on the strip' }).click())
    expect(spanOf(query)).toBeLessThan(3 * 3_600_000)
    await hand().focus()
    await traceAfter(() => hand().press('Home'))
  })

  it('lets new readings appear by themselves', async () => {
    const series = server.week.series.get('tails-a')!
    const last = series.t[series.t.length - 1]!
    const t = Array.from({ length: 30 }, (_, i) => last + (i + 1) * 60_000)
    const query = await traceAfter(() =>
      server.call('POST', `/sites/${server.site}/readings`, {
        blocks: [{ channel: 'tails-a', t, v: t.map(() => 11) }],
      }),
    )
    expect(Date.parse(query.get('to')!)).toBeGreaterThan(t[t.length - 1]!)
    await expect.poll(() => open.page.locator('.whose').textContent()).toContain('Last reading Mon 28 Sept, 00:2')
  })

  it('keeps what is there when the network goes, and says so', async () => {
    await open.context.setOffline(true)
    await expect.poll(() => open.page.locator('.offline').count()).toBe(1)
    await hand().press('+')
    await open.page.getByText('The trace could not be fetched.').waitFor()
    expect((await drawnPixels(open.page)).trace).toBeGreaterThan(100)
    await open.context.setOffline(false)
    await open.page.getByRole('button', { name: 'Try again' }).click()
    await expect.poll(() => open.page.getByText('The trace could not be fetched.').count()).toBe(0)
  })

  it('chooses another device', async () => {
    await open.page.getByRole('link', { name: /Shop and outside/ }).click()
    await expect.poll(() => new URL(open.page.url()).searchParams.get('rcd')).toBe('B')
    await open.page.getByTestId('answer').waitFor()
  })

  it('never needed anything that the content security policy denies', () => {
    expect(open.complaints).toEqual([])
  })
})
