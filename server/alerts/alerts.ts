import { randomBytes } from 'node:crypto'
import { type AlertSettings, NO_ALERTS } from '../../core/contract/index.ts'
import type { Taken } from '../intake/taken.ts'
import type { AlertSettingsRecord, MatterRecord } from '../store/alert-port.ts'
import { type Page, type SiteRecord, type Store, type StoredRecord, StoreError } from '../store/port.ts'
import { Arrivals } from './arrivals.ts'
import { type AskFindings, type DeviceFacts, FactsOfDevices } from './device-facts.ts'
import { sendMail } from './mail.ts'
import type { Noticed } from './notice.ts'
import { type DeviceLevel, noticeLevels } from './notice-level.ts'
import { noticeRemedies } from './notice-remedies.ts'
import { noticeSilence } from './notice-silence.ts'
import { AHEAD_MS, noticeTrips, TRIP_TOLD_WITHIN_MS } from './notice-trips.ts'
import { type Carry, Outbox } from './outbox.ts'
import { planChange, waysOf } from './plan.ts'
import { levelChannel, recentLevel } from './recent-level.ts'
import type { AlertServerSettings } from './settings.ts'
import { callWebhook } from './webhook.ts'

/** What the ways in tell. */
export interface AlertsDoor {
  /** Readings of a site came just now. */
  arrived(site: string, taken: Pick<Taken, 'batches' | 'expected'>): void
  /** Records, the sheet or the settings of a site changed: look at it soon. */
  changed(site: string): void
}

/** Where nobody watches. */
export const NO_ALERTS_DOOR: AlertsDoor = { arrived: () => undefined, changed: () => undefined }

export interface Alerts extends AlertsDoor {
  /** Looks at every site that posts or has settings, then begins to deliver what is due. Resolves with how many matters opened and closed. */
  look(): Promise<LookReport>
  /** Resolves when nothing is being looked at, asked for or delivered. */
  settled(): Promise<void>
  /** Ends; what is in hand is written down before it resolves. */
  close(): Promise<void>
}

export interface LookReport {
  readonly opened: number
  readonly closed: number
}

export interface AlertsOptions {
  readonly store: Pick<Store, 'alerts' | 'site' | 'records' | 'extents' | 'readings'>
  readonly findings: AskFindings
  readonly now: () => number
  /** ms of a clock that only runs forward. */
  readonly elapsed: () => number
  readonly server: AlertServerSettings
  readonly warn: (error: unknown) => void
  /** Told when matters of a site changed. */
  readonly onChange?: (site: string) => void
}

/** No trip that was told is looked at longer than this; see notice-trips.ts. */
const KNOWN_MS = TRIP_TOLD_WITHIN_MS + 2 * AHEAD_MS
const KEPT_MS = 180 * 86_400_000
const DAY_MS = 86_400_000
/** A level older than this is not recent. */
const FRESH_LEVEL_MS = 15 * 60_000
const MOST_TRIPS = 1_000

/** Watches sites: what is worth telling, and who is told. @throws {StoreError} from the store */
export async function openAlerts(options: AlertsOptions): Promise<Alerts> {
  const { store, now, elapsed, server, warn, onChange = () => undefined } = options
  const arrivals = new Arrivals(elapsed, now)
  arrivals.load(await store.alerts.paces())
  const facts = new FactsOfDevices(options.findings, elapsed, warn)
  const outbox = new Outbox({ store, now, carry: carryBy(server, now) })
  let looking: Promise<unknown> = Promise.resolve()
  let soon: ReturnType<typeof setImmediate> | undefined
  const urgent = new Set<string>()
  let forgotAt = Number.NEGATIVE_INFINITY
  let closed = false

  /** One look after the other: two at once could open one matter twice. */
  function inTurn<T>(work: () => Promise<T>): Promise<T> {
    const turn = looking.then(work)
    looking = turn.catch(() => undefined as T | undefined)
    return turn
  }

  async function lookAt(id: string): Promise<LookReport> {
    const site = await store.site(id)
    if (site === undefined) {
      arrivals.forget(id)
      return { opened: 0, closed: 0 }
    }
    const kept = await store.alerts.settings(id)
    const known = await store.alerts.mattersSince(id, now() - KNOWN_MS)
    const noticed = await notice(site, kept, known)
    const change = planChange(known, noticed, kept?.settings ?? NO_ALERTS, now(), newId)
    if (change === undefined) return { opened: 0, closed: 0 }
    await store.alerts.change(id, change)
    onChange(id)
    return { opened: change.open.length, closed: change.close.length }
  }

  async function notice(
    site: SiteRecord,
    kept: AlertSettingsRecord | undefined,
    known: readonly MatterRecord[],
  ): Promise<Noticed[]> {
    const settings = kept?.settings ?? NO_ALERTS
    const open = known.filter(({ closedAt }) => closedAt === null)
    const watched = arrivals.watched(site.id)
    const noticed: Noticed[] = [noticeSilence(site.sheet, watched, settings.silence, open)]
    if (kept === undefined) return noticed
    const { about } = settings
    const asks = waysOf(settings).length > 0 && (about.trip || about.level || about.remedy)
    const devices = asks ? site.sheet.rcds.flatMap(({ ref }) => facts.of(site, ref) ?? []) : []
    const inLog = devices.flatMap(({ rcd, unwritten }) => unwritten.map((span) => ({ rcd, ...span })))
    noticed.push(noticeTrips(site.sheet, await tripsOf(site.id), kept.since, known, now(), inLog))
    const live = new Set(
      watched.filter((one) => one.lastAt !== null && one.silentMs < FRESH_LEVEL_MS).map((one) => one.channel),
    )
    noticed.push(noticeLevels(site.sheet, await levelsOf(site, devices, live), settings.level, open))
    noticed.push(noticeRemedies(site.sheet, devices, open))
    return noticed
  }

  async function tripsOf(site: string): Promise<readonly StoredRecord<'trip'>[]> {
    const span = { from: now() - TRIP_TOLD_WITHIN_MS, to: now() + AHEAD_MS }
    const trips: StoredRecord<'trip'>[] = []
    let after: string | undefined
    do {
      const page: Page<StoredRecord<'trip'>> = await store.records(site, 'trip', { ...span, after, limit: MOST_TRIPS })
      trips.push(...page.items)
      after = page.next ?? undefined
    } while (after !== undefined && trips.length < MOST_TRIPS)
    return trips
  }

  async function levelsOf(
    site: SiteRecord,
    devices: readonly DeviceFacts[],
    live: ReadonlySet<string>,
  ): Promise<DeviceLevel[]> {
    const levels: DeviceLevel[] = []
    for (const { rcd, tripMa, basis } of devices) {
      const channel = levelChannel(site.sheet, rcd)
      if (channel === undefined || !live.has(channel)) continue
      const levelMa = await recentLevel(store, site.id, channel)
      if (levelMa !== undefined) levels.push({ rcd, tripMa, basis, levelMa })
    }
    return levels
  }

  async function lookAtAll(sites: ReadonlySet<string>): Promise<LookReport> {
    let opened = 0
    let over = 0
    for (const site of sites) {
      if (closed) break
      try {
        const report = await lookAt(site)
        opened += report.opened
        over += report.closed
      } catch (error) {
        // One site that cannot be read hides no other.
        if (error instanceof StoreError && error.code === 'closed') break
        warn(error)
      }
    }
    if (!closed) outbox.run(warn)
    return { opened, closed: over }
  }

  async function tidy(): Promise<void> {
    await store.alerts.savePaces(arrivals.takeChangedPaces())
    if (elapsed() - forgotAt < DAY_MS) return
    forgotAt = elapsed()
    await store.alerts.forgetAlertsBefore(now() - KEPT_MS)
  }

  return {
    arrived: (site, taken) => arrivals.note(site, taken),
    changed: (site) => {
      facts.expire(site)
      urgent.add(site)
      soon ??= setImmediate(() => {
        soon = undefined
        const sites = new Set(urgent)
        urgent.clear()
        if (!closed) inTurn(() => lookAtAll(sites)).catch(warn)
      })
    },
    look: () =>
      inTurn(async () => {
        const report = await lookAtAll(new Set([...arrivals.sites(), ...(await store.alerts.sitesWithSettings())]))
        await tidy()
        return report
      }),
    settled: async () => {
      await looking
      await facts.settled()
      await outbox.settled()
    },
    close: async () => {
      closed = true
      clearImmediate(soon)
      await looking
      await outbox.stop()
      await store.alerts.savePaces(arrivals.takeChangedPaces())
    },
  }
}

/** Puts a message that tests the ways of a site into its outbox. Resolves with its id. */
export async function tellTest(
  store: Pick<Store, 'alerts'>,
  site: string,
  settings: AlertSettings,
  at: number,
): Promise<string> {
  const [matter, message] = [newId(), newId()]
  const text = 'This is a test. Whoever reads it will be told what happens at this site.'
  await store.alerts.change(site, {
    open: [{ id: matter, key: `test/${matter}`, kind: 'test', openedAt: at, text, figures: {} }],
    close: [],
    messages: [{ id: message, kind: 'test', createdAt: at, matters: [matter], to: waysOf(settings) }],
  })
  await store.alerts.change(site, { open: [], close: [{ id: matter, at }], messages: [] })
  return message
}

function newId(): string {
  return randomBytes(10).toString('hex')
}

/** Carries by mail relay and by webhook. */
function carryBy(server: AlertServerSettings, now: () => number): Carry {
  return async ({ way, target, message, createdAt }, { subject, text, json }, { secret }) => {
    if (way === 'email') {
      if (server.smtp === undefined) throw new Error('this server has no mail relay: LEAKTIDE_SMTP_URL')
      await sendMail({ to: target, subject, text, message, at: createdAt }, server.smtp)
    } else {
      if (secret === null) throw new Error('there is no secret to sign with')
      await callWebhook({ url: target, secret, message, body: json, at: now() }, { allowed: server.webhookHosts })
    }
  }
}
