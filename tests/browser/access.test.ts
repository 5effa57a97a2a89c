import { readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import type { AxeResults } from 'axe-core'
import type { Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type BakeryServer, startBakery } from './bakery-server.ts'
import { DESKTOP, HAS_BROWSER, openPage, PHONE, shoot } from './browser.ts'
import { buildPage } from './built-page.ts'

const AXE = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8')

/** What axe-core finds wrong, as `rule: place`. */
async function faultsOf(page: Page): Promise<string[]> {
  await page.evaluate(AXE)
  const results = await page.evaluate(() => (window as unknown as { axe: { run(): Promise<AxeResults> } }).axe.run())
  return results.violations.flatMap((fault) =>
    fault.nodes.map((node) => `${fault.id}: ${node.target.join(' ')} ${node.failureSummary}`),
  )
}

describe.runIf(HAS_BROWSER)('for everybody, on every screen', () => {
  let server: BakeryServer
  let occupant: string

  beforeAll(async () => {
    await buildPage()
    server = await startBakery(30)
    await server.call('POST', '/sites', { name: 'Water mill', timeZone: 'Europe/Vienna' })
    occupant = await server.makeKey('occupant')
  }, 120_000)
  afterAll(() => server?.stop())

  const screens = [
    ['phone', 'light', PHONE],
    ['phone', 'dark', PHONE],
    ['desktop', 'light', DESKTOP],
    ['desktop', 'dark', DESKTOP],
  ] as const

  it.each(screens)(
    'has no fault that axe knows and nothing wider than the screen: %s, %s',
    async (size, colorScheme, screen) => {
      const open = await openPage({ ...screen, colorScheme, reducedMotion: 'reduce' })
      const { page } = open
      const look = async (name: string): Promise<void> => {
        expect(await faultsOf(page), name).toEqual([])
        expect(await page.evaluate(() => document.documentElement.scrollWidth - innerWidth), name).toBeLessThanOrEqual(
          0,
        )
        await shoot(page, `${name}-${size}-${colorScheme}`)
      }
      try {
        await page.goto(server.url)
        await page.getByLabel('Key').waitFor()
        await look('sign-in')
        await page.getByLabel('Key').fill(server.ownerKey)
        await page.getByRole('button', { name: 'Sign in' }).click()
        await page.getByRole('link', { name: 'Village bakery' }).waitFor()
        await look('sites')
        await page.getByRole('link', { name: 'Village bakery' }).click()
        await page.locator('.lane-weather canvas').first().waitFor()
        await look('sheet')
        for (const fold of await page.locator('details').all())
          await fold.evaluate((one: HTMLDetailsElement) => {
            one.open = true
          })
        await look('sheet-unfolded')
        await page.goto(`${server.url}/report?rcd=A#key=${occupant}`)
        await page.reload()
        await page.getByRole('button', { name: 'It went off' }).waitFor()
        await page.getByLabel('I found it off').check()
        await look('report')
      } finally {
        await open.close()
      }
    },
  )

  it('can be read and worked by keyboard alone', async () => {
    const open = await openPage(DESKTOP)
    const { page } = open
    try {
      await page.goto(`${server.url}/sites/${server.site}#key=${server.ownerKey}`)
      await page.getByTestId('answer').waitFor()
      await page.locator('.lane-weather canvas').first().waitFor()
      const reached: string[] = []
      for (let i = 0; i < 40; i++) {
        await page.keyboard.press('Tab')
        reached.push(
          await page.evaluate(() => {
            const element = document.activeElement
            const seen = element !== null && getComputedStyle(element).outlineStyle !== 'none'
            return `${element?.className || element?.tagName} ${seen ? 'seen' : 'unseen'}`
          }),
        )
        if (reached.some((one) => one.startsWith('strip-hand'))) break
      }
      expect(reached).toContain('strip-hand seen')
      expect(reached.filter((one) => one.endsWith('unseen'))).toEqual([])
    } finally {
      await open.close()
    }
  })
})
