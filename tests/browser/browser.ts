import { existsSync, mkdirSync, mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { type BrowserContext, type BrowserContextOptions, chromium, type Page } from 'playwright-core'
import { findChromium } from '../../server/launch/chromium.mjs'

const executablePath = findChromium()

/** Whether these tests can run here. Where a browser is promised (CI) they run and fail without one. */
export const HAS_BROWSER: boolean = executablePath !== undefined || Boolean(process.env.CI)
if (!HAS_BROWSER) process.stderr.write('No Chromium here: the tests of the page did not run.\n')

/** Screenshots stay outside the repository. */
const SHOTS = process.env.LEAKTIDE_SHOTS ?? join(tmpdir(), 'leaktide-shots')

export const DESKTOP = Object.freeze({ viewport: { width: 1400, height: 900 } }) satisfies BrowserContextOptions
export const PHONE = Object.freeze({
  viewport: { width: 390, height: 844 },
  deviceScaleFactor: 2,
  hasTouch: true,
  isMobile: true,
}) satisfies BrowserContextOptions

const FLAGS = [
  '--headless',
  '--no-sandbox',
  '--disable-gpu',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
]

/** A page of its own in a browser of its own, with what it complained about. */
export interface OpenPage {
  readonly page: Page
  readonly context: BrowserContext
  /** Errors of scripts and of the content security policy; not those of a network that is away. */
  readonly complaints: readonly string[]
  close(): Promise<void>
}

/** Opens a browser with a profile of its own. */
export async function openPage(options: BrowserContextOptions = DESKTOP): Promise<OpenPage> {
  if (executablePath === undefined || !existsSync(executablePath)) throw new Error('There is no Chromium here')
  const profile = mkdtempSync(join(tmpdir(), 'leaktide-chromium-'))
  const context = await chromium.launchPersistentContext(profile, { executablePath, args: FLAGS, ...options })
  const page = context.pages()[0] ?? (await context.newPage())
  const complaints: string[] = []
  page.on('pageerror', (error) => complaints.push(error.stack ?? error.message))
  page.on('console', (message) => {
    const expected = message.text().includes('401 (Unauthorized)') || message.text().includes('net::ERR_')
    if (message.type() === 'error' && !expected) complaints.push(message.text())
  })
  return {
    page,
    context,
    complaints,
    close: async () => {
      await context.close()
      rmSync(profile, { recursive: true, force: true })
    },
  }
}

/** Keeps a picture of the whole page for people to look at. */
export async function shoot(page: Page, name: string): Promise<void> {
  mkdirSync(SHOTS, { recursive: true })
  await page.screenshot({ path: join(SHOTS, `${name}.png`), fullPage: true })
}
