import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type BakeryServer, startBakery } from './bakery-server.ts'
import { DESKTOP, HAS_BROWSER, type OpenPage, openPage } from './browser.ts'
import { buildPage } from './built-page.ts'

describe.runIf(HAS_BROWSER)('what was noticed', () => {
  let server: BakeryServer
  let open: OpenPage

  beforeAll(async () => {
    await buildPage()
    server = await startBakery(60)
    open = await openPage({ ...DESKTOP, colorScheme: 'light' })
    await open.page.goto(`${server.url}/#key=${server.ownerKey}`)
    await open.page.getByTestId('answer').waitFor()
  }, 120_000)
  afterAll(async () => {
    await open?.close()
    await server?.stop()
  })

  it('stands above the answer as it comes, and goes when it is over', async () => {
    const list = open.page.getByTestId('open-matters')
    expect(await list.count()).toBe(0)
    const matter = { key: 'silence/tails-a', kind: 'silence' as const, figures: {} }
    const text = 'Nothing has come from channel tails-a <b>since</b> 02:14.'
    const change = { open: [{ ...matter, id: 'm1', openedAt: Date.now(), text }], close: [], messages: [] }
    await server.notice(change)
    await list.waitFor()
    expect(await list.textContent()).toBe(text)
    await server.notice({ open: [], close: [{ id: 'm1', at: Date.now() }], messages: [] })
    await list.waitFor({ state: 'detached' })
  })

  it('is counted in the list of sites', async () => {
    await server.call('POST', '/sites', { name: 'Mill', timeZone: 'Europe/Vienna' })
    const matter = {
      id: 'm2',
      key: 'level/A',
      kind: 'level' as const,
      openedAt: Date.now(),
      text: 'High.',
      figures: {},
    }
    await server.notice({ open: [matter], close: [], messages: [] })
    await open.page.goto(`${server.url}/`)
    await open.page.getByText('one thing wants a look').waitFor()
  })
})
