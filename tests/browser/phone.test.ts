import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type BakeryServer, startBakery } from './bakery-server.ts'
import { HAS_BROWSER, type OpenPage, openPage, PHONE, shoot } from './browser.ts'
import { buildPage } from './built-page.ts'

interface Said {
  readonly notes: readonly string[]
}

describe.runIf(HAS_BROWSER)('the sheet on a phone', () => {
  let server: BakeryServer
  let open: OpenPage

  beforeAll(async () => {
    await buildPage()
    server = await startBakery(30)
    open = await openPage(PHONE)
    await open.page.goto(`${server.url}/#key=${server.ownerKey}`)
    await open.page.getByTestId('answer').waitFor()
    await open.page.locator('.lane-weather canvas').first().waitFor()
  }, 120_000)
  afterAll(async () => {
    await open?.close()
    await server?.stop()
  })

  it('begins its answer on the first screen', async () => {
    const box = (await open.page.getByTestId('answer').boundingBox())!
    expect(box.y + box.height).toBeLessThan(PHONE.viewport.height)
  })

  it('leads from the answer to what to do next', async () => {
    await open.page.getByRole('link', { name: 'What to do next on site' }).click()
    const heading = open.page.getByRole('heading', { name: 'What to do next on site' })
    await expect.poll(async () => (await heading.boundingBox())?.y).toBeLessThan(PHONE.viewport.height)
    expect(await open.page.getByTestId('answer').count()).toBe(1)
  })

  it.each([
    ['sideways', 1, 0],
    ['upright', 0, 1],
  ])('zooms by two fingers that part %s or nearly so', async (_, across, down) => {
    const hand = open.page.getByRole('application')
    await hand.focus()
    await hand.press('Home')
    await hand.evaluate((element) => element.scrollIntoView({ block: 'center' }))
    const span = (): Promise<string | null> => open.page.locator('.strip-controls').textContent()
    const before = await span()
    const box = (await hand.boundingBox())!
    const x = box.x + box.width / 2
    const y = PHONE.viewport.height / 2
    const cdp = await open.context.newCDPSession(open.page)
    const fingers = (apart: number): { x: number; y: number; id: number }[] => [
      { x: x - 15 - apart * (0.3 + across), y: y - apart * down, id: 0 },
      { x: x + 15 + apart * (0.3 + across), y: y + apart * down, id: 1 },
    ]
    await cdp.send('Input.dispatchTouchEvent', { type: 'touchStart', touchPoints: fingers(0) })
    for (let apart = 10; apart <= 80; apart += 10) {
      await cdp.send('Input.dispatchTouchEvent', { type: 'touchMove', touchPoints: fingers(apart) })
    }
    await cdp.send('Input.dispatchTouchEvent', { type: 'touchEnd', touchPoints: [] })
    await expect.poll(span).not.toBe(before)
    await expect.poll(span).not.toContain('7 days')
  })

  it('shows three notes and folds the others, saying how many', async () => {
    const { notes } = await server.call<Said>('GET', `/sites/${server.site}/rcds/A/findings`)
    expect(notes.length).toBeGreaterThan(3)
    expect(await open.page.locator('.notes > ul > li').count()).toBe(3)
    expect(await open.page.locator('.notes summary').textContent()).toContain(String(notes.length - 3))
    expect(await open.page.locator('.notes li').allTextContents()).toEqual(notes)
  })

  it('says what is empty and what to do about it', async () => {
    const sheet = {
      name: 'Water mill',
      timeZone: 'Europe/Vienna',
      rcds: [{ ref: 'A', ratedMa: 30, circuits: [{ ref: '1', loads: [{ ref: 'saw' }] }] }],
      channels: [{ ref: 'tails', quantity: 'leakage', rcd: 'A' }],
    }
    const { id } = await server.call<{ id: string }>('POST', '/sites', sheet)
    await open.page.goto(`${server.url}/sites/${id}`)
    await open.page.locator('.strip .state').getByText('Once a logger posts to the leakage channel').waitFor()
    await open.page.getByText('No trip in this period.').waitFor()
    expect(await open.page.locator('.headroom .state').textContent()).toContain('logging clamp')
    await shoot(open.page, 'empty-site-phone')
  })

  it('complained about nothing', () => {
    expect(open.complaints).toEqual([])
  })
})
