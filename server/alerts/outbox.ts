import type { AlertSettingsRecord, DeliveryRecord } from '../store/alert-port.ts'
import { type SiteRecord, type Store, StoreError } from '../store/port.ts'
import { waysOf } from './plan.ts'
import { isQuiet } from './quiet.ts'
import { type Rendered, render } from './render.ts'

/** Carries one message to one place. @throws {Error} why it did not arrive */
export type Carry = (delivery: DeliveryRecord, rendered: Rendered, settings: AlertSettingsRecord) => Promise<void>

export interface OutboxOptions {
  readonly store: Pick<Store, 'alerts' | 'site'>
  readonly now: () => number
  readonly carry: Carry
}

const FIRST_WAIT_MS = 30_000
const MOST_WAIT_MS = 6 * 3_600_000
/** With these waits about a week. */
const MOST_ATTEMPTS = 38
const READ_AT_ONCE = 10_000
const PLACES_AT_ONCE = 16

/**
 * Delivers what waits in the outbox. A delivery is attempted until the place takes it, after waits that double; what
 * was taken is written down before anything else is done, so that nothing is sent twice or lost by a restart. (A
 * process killed between the two sends it again, under the same id.) Waits that a clock set back made endless end.
 */
export class Outbox {
  readonly #options: OutboxOptions
  /** Places that something is on its way to: one that does not answer holds up no other. */
  readonly #busy = new Map<string, Promise<void>>()
  readonly #reading = new Set<Promise<void>>()
  #left = false
  #stopped = false

  constructor(options: OutboxOptions) {
    this.#options = options
  }

  /** Begins to deliver what is due, in the background. */
  run(onError: (error: unknown) => void): void {
    if (this.#stopped) return
    const reading = this.#begin(onError)
      .catch(onError)
      .finally(() => this.#reading.delete(reading))
    this.#reading.add(reading)
  }

  /** Resolves when what was begun is done. */
  async settled(): Promise<void> {
    while (this.#reading.size + this.#busy.size > 0) await Promise.all([...this.#reading, ...this.#busy.values()])
  }

  /** Begins nothing more; resolves when what is in hand is written down. */
  async stop(): Promise<void> {
    this.#stopped = true
    await this.settled()
  }

  async #begin(onError: (error: unknown) => void): Promise<void> {
    const { store, now } = this.#options
    const at = now()
    // What was on its way while this list was read may have arrived since.
    const onTheirWay = new Set(this.#busy.keys())
    const due = await this.#notWaiting(await store.alerts.due(at, at + MOST_WAIT_MS, READ_AT_ONCE), at)
    for (const [place, deliveries] of byPlace(due)) {
      if (this.#stopped) return
      if (onTheirWay.has(place) || this.#busy.has(place) || this.#busy.size >= PLACES_AT_ONCE) {
        this.#left = true
        continue
      }
      const work = this.#deliverTo(deliveries)
        .catch(onError)
        .finally(() => {
          this.#busy.delete(place)
          this.#goOn(onError)
        })
      this.#busy.set(place, work)
    }
    if (this.#busy.size === 0) this.#goOn(onError)
  }

  /** Without what waits for the end of quiet hours: it would take the turn of others, again and again. */
  async #notWaiting(due: readonly DeliveryRecord[], at: number): Promise<DeliveryRecord[]> {
    const { store } = this.#options
    const sites = new Map<string, { site: SiteRecord; settings: AlertSettingsRecord } | undefined>()
    const free: DeliveryRecord[] = []
    for (const delivery of due) {
      if (!sites.has(delivery.site)) {
        const site = await store.site(delivery.site)
        const settings = site && (await store.alerts.settings(site.id))
        sites.set(delivery.site, site && settings && { site, settings })
      }
      const found = sites.get(delivery.site)
      if (found !== undefined && !mustWait(delivery, found.site, found.settings, at)) free.push(delivery)
    }
    return free
  }

  /** Looks again where something was left because its place was busy. */
  #goOn(onError: (error: unknown) => void): void {
    if (!this.#left) return
    this.#left = false
    this.run(onError)
  }

  /** One place, one after the other; the first failure ends it for now. */
  async #deliverTo(deliveries: readonly DeliveryRecord[]): Promise<void> {
    for (const delivery of deliveries) {
      if (this.#stopped || !(await this.#attempt(delivery))) return
    }
  }

  /** False when the place did not take it. */
  async #attempt(delivery: DeliveryRecord): Promise<boolean> {
    const { store, now, carry } = this.#options
    const site = await store.site(delivery.site)
    const settings = site && (await store.alerts.settings(site.id))
    if (site === undefined || settings === undefined) return true
    const wanted = waysOf(settings.settings).some(
      ({ way, target }) => way === delivery.way && target === delivery.target,
    )
    if (!wanted) {
      const at = now()
      const error = 'this place was taken out of the settings'
      await store.alerts.attempted(delivery.num, { state: 'given-up', at, nextAt: at, error })
      return true
    }
    if (mustWait(delivery, site, settings, now())) return true
    try {
      const matters = await store.alerts.mattersById(site.id, delivery.matters)
      await carry(delivery, render(delivery, matters, site), settings)
    } catch (error) {
      if (error instanceof StoreError) throw error
      await this.#failed(delivery, error instanceof Error ? error.message : String(error))
      return false
    }
    await store.alerts.attempted(delivery.num, { state: 'sent', at: now() })
    return true
  }

  async #failed({ num, attempts }: DeliveryRecord, error: string): Promise<void> {
    const at = this.#options.now()
    const nextAt = at + Math.min(MOST_WAIT_MS, FIRST_WAIT_MS * 2 ** attempts)
    const state = attempts + 1 >= MOST_ATTEMPTS ? 'given-up' : 'waiting'
    await this.#options.store.alerts.attempted(num, { state, at, nextAt, error: error.slice(0, 300) })
  }
}

function byPlace(deliveries: readonly DeliveryRecord[]): ReadonlyMap<string, readonly DeliveryRecord[]> {
  const places = new Map<string, DeliveryRecord[]>()
  for (const delivery of deliveries) {
    const place = `${delivery.way} ${delivery.target}`
    const others = places.get(place)
    if (others === undefined) places.set(place, [delivery])
    else others.push(delivery)
  }
  return places
}

/** During the quiet hours of the site everything waits but what may break through. */
function mustWait(
  { kind }: DeliveryRecord,
  { sheet }: SiteRecord,
  { settings }: AlertSettingsRecord,
  now: number,
): boolean {
  if (kind === 'test' || (kind === 'trip' && settings.quiet?.tripsBreakThrough === true)) return false
  return isQuiet(settings.quiet, sheet.timeZone, now)
}
