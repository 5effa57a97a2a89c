import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type BakeryServer, startBakery } from './bakery-server.ts'
import { HAS_BROWSER, type OpenPage, openPage, PHONE, shoot } from './browser.ts'
import { buildPage } from './built-page.ts'

describe.runIf(HAS_BROWSER)('signing in', () => {
  let server: BakeryServer
  let open: OpenPage

  beforeAll(async () => {
    await buildPage()
    server = await startBakery(100)
    open = await openPage(PHONE)
  }, 120_000)
  afterAll(async () => {
    await open?.close()
    await server?.stop()
  })

  it('asks for a key, and says what is wrong with a wrong one', async () => {
    await open.page.goto(server.url)
    await open.page.getByLabel('Key').fill('no such key at all')
    await open.page.getByRole('button', { name: 'Sign in' }).click()
    await open.page.getByRole('alert').waitFor()
    expect(await open.page.getByRole('alert').textContent()).toContain('not known here')
  })

  it('lets a viewer read, and leaves on signing out', async () => {
    await open.page.getByLabel('Key').fill(await server.makeKey('viewer'))
    await open.page.getByRole('button', { name: 'Sign in' }).click()
    await open.page.getByTestId('answer').waitFor()
    await open.page.getByRole('button', { name: 'Sign out' }).click()
    await open.page.getByLabel('Key').waitFor()
    await open.page.reload()
    await open.page.getByLabel('Key').waitFor()
  })

  it('tells a logger key what it is for', async () => {
    await open.page.getByLabel('Key').fill(await server.makeKey('logger'))
    await open.page.getByRole('button', { name: 'Sign in' }).click()
    await open.page.getByText('This is a logger key.').waitFor()
    await open.page.getByRole('button', { name: 'Sign out' }).click()
    await open.page.getByLabel('Key').waitFor()
  })

  it('lists the sites when there are several, and finds one by name', async () => {
    await server.call('POST', '/sites', { name: 'Water mill', timeZone: 'Europe/Vienna' })
    await open.page.goto(server.url)
    await open.page.getByLabel('Key').fill(server.ownerKey)
    await open.page.getByRole('button', { name: 'Sign in' }).click()
    await open.page.getByRole('link', { name: 'Water mill' }).waitFor()
    await shoot(open.page, 'sites-phone')
    await open.page.getByLabel('Search by name').fill('baker')
    await expect.poll(() => open.page.getByRole('link', { name: 'Water mill' }).count()).toBe(0)
    await open.page.getByRole('link', { name: 'Village bakery' }).click()
    await open.page.getByTestId('answer').waitFor()
  })

  it('complained about nothing', () => {
    expect(open.complaints).toEqual([])
  })
})

describe.runIf(HAS_BROWSER)('the page of an occupant', () => {
  let server: BakeryServer
  let open: OpenPage
  interface Posted {
    readonly rcd: string
    readonly at?: string
    readonly after?: string
    readonly before?: string
    readonly note?: string
  }
  const tripsNow = async (): Promise<Posted[]> =>
    (await server.call<{ items: Posted[] }>('GET', `/sites/${server.site}/trips?limit=1000`)).items

  beforeAll(async () => {
    await buildPage()
    server = await startBakery(100)
    open = await openPage(PHONE)
    await open.page.goto(`${server.url}/report?rcd=A#key=${await server.makeKey('occupant')}`)
  }, 120_000)
  afterAll(async () => {
    await open?.close()
    await server?.stop()
  })

  it('shows one large button and nothing of the site', async () => {
    await open.page.getByRole('button', { name: 'It went off' }).waitFor()
    const text = (await open.page.locator('body').textContent()) ?? ''
    expect(text).not.toContain('bakery')
    expect(text).not.toContain('mA')
    expect(open.page.url()).not.toContain('key')
    await shoot(open.page, 'report-phone')
  })

  it('keeps what was typed when the network is away, then posts one trip', async () => {
    const before = await tripsNow()
    await open.page.getByLabel(/What was running/).fill('Mixer was on again')
    await open.context.setOffline(true)
    await open.page.getByRole('button', { name: 'It went off' }).click()
    await open.page.getByText('Not sent yet.').waitFor()
    expect(await open.page.getByLabel(/What was running/).inputValue()).toBe('Mixer was on again')
    await open.context.setOffline(false)
    await open.page.getByRole('button', { name: 'It went off' }).click()
    await open.page.getByText('Noted. Thank you.').waitFor()
    const fresh = (await tripsNow()).filter(
      (trip) => !before.some((old) => JSON.stringify(old) === JSON.stringify(trip)),
    )
    expect(fresh).toHaveLength(1)
    expect(fresh[0]).toMatchObject({ rcd: 'A', note: 'Mixer was on again' })
    expect(Math.abs(Date.parse(fresh[0]!.at!) - Date.now())).toBeLessThan(60_000)
  })

  it('posts an interval when it was found off', async () => {
    await open.page.getByRole('button', { name: 'Report another one' }).click()
    await open.page.getByLabel('I found it off').check()
    await open.page.getByLabel('Everything was still on at').fill('2026-09-20T22:30')
    await open.page.getByLabel('Found off at').fill('2026-09-21T06:40')
    await open.page.getByRole('button', { name: 'It went off' }).click()
    await open.page.getByText('Noted. Thank you.').waitFor()
    const found = (await tripsNow()).find(
      (trip) =>
        trip.after !== undefined &&
        trip.note === undefined &&
        trip.rcd === 'A' &&
        Date.parse(trip.before!) - Date.parse(trip.after) === (8 * 60 + 10) * 60_000,
    )
    expect(found).toBeDefined()
  })

  it('stays where it is on any other address', async () => {
    await open.page.goto(`${server.url}/sites/${server.site}`)
    await open.page.getByRole('button', { name: 'It went off' }).waitFor()
  })
})
