import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { NO_ALERTS } from '../../../core/contract/index.ts'
import type { MatterChange, NewMatter } from '../../../server/store/alert-port.ts'
import type { Store } from '../../../server/store/port.ts'
import { ACT, bakery, code, HOUR, T0 } from './bakery.ts'

/** What every implementation of the port must do with matters, their outbox and refused messages. `open` makes an empty store, or opens the one it made. */
export function alertsSuite(open: () => Promise<Store>): void {
  let store: Store
  beforeAll(async () => {
    store = await open()
  })
  afterAll(async () => {
    await store.close()
  })
  const newSite = async (): Promise<string> => (await store.createSite(bakery(), ACT)).id
  const matter = (id: string, key = id, openedAt = T0): NewMatter => ({
    id,
    key,
    kind: 'silence',
    openedAt,
    text: `About ${key}.`,
    figures: { channel: key },
  })
  const telling = (site: string, ...matters: NewMatter[]): MatterChange => ({
    open: matters,
    close: [],
    messages: [
      {
        id: `m-${site}-${matters[0]!.id}`,
        kind: 'silence',
        createdAt: matters[0]!.openedAt,
        matters: matters.map(({ id }) => id),
        to: [
          { way: 'email', target: 'anna@bakery.example' },
          { way: 'webhook', target: 'https://hooks.bakery.example/' },
        ],
      },
    ],
  })
  const own = async (
    site: string,
    now = T0,
  ): Promise<{ num: number; way: string; nextAt: number; attempts: number }[]> =>
    (await store.alerts.due(now, now + 6 * HOUR, 1_000)).filter((one) => one.site === site)

  describe('matters and their outbox', () => {
    it('hold one open matter of a key, told once; another after it was over', async () => {
      const site = await newSite()
      await store.alerts.change(site, telling(site, matter('s1-a', 'a')))
      await store.alerts.change(site, telling(site, matter('s1-b', 'a')))
      expect((await store.alerts.mattersSince(site, T0)).map(({ id }) => id)).toEqual(['s1-a'])
      expect(await own(site)).toHaveLength(2)
      await store.alerts.change(site, { ...telling(site, matter('s1-c', 'a')), close: [{ id: 's1-a', at: T0 + HOUR }] })
      const matters = await store.alerts.mattersSince(site, T0)
      expect(matters.map(({ id, closedAt }) => [id, closedAt])).toEqual([
        ['s1-a', T0 + HOUR],
        ['s1-c', null],
      ])
      expect(matters[0]!.deliveries.map(({ way, state }) => [way, state])).toEqual([
        ['email', 'waiting'],
        ['webhook', 'waiting'],
      ])
      expect(await store.alerts.mattersById(site, ['s1-c', 'nothing'])).toMatchObject([
        { id: 's1-c', figures: { channel: 'a' } },
      ])
      expect(await store.alerts.openCounts([site, 'nowhere'])).toEqual(new Map([[site, 1]]))
    })

    it('keep a change whole or not at all', async () => {
      const site = await newSite()
      const same = [matter('s2-a'), matter('s2-a', 'other')]
      await expect(store.alerts.change(site, telling(site, ...same))).rejects.toThrow()
      expect(await store.alerts.mattersSince(site, 0)).toEqual([])
      await expect(store.alerts.change('nowhere', telling('x', matter('s2-b')))).rejects.toEqual(code('no_such_site'))
    })

    it('say what is due, what was tried and what is done, for ever after too', async () => {
      const site = await newSite()
      await store.alerts.change(site, telling(site, matter('s3-a')))
      const [mail, hook] = await own(site)
      await store.alerts.attempted(mail!.num, { state: 'sent', at: T0 + 1 })
      await store.alerts.attempted(hook!.num, {
        state: 'waiting',
        at: T0 + 1,
        nextAt: T0 + HOUR,
        error: 'answered 503',
      })
      expect(await own(site)).toEqual([])
      await store.close()
      store = await open()
      expect(await own(site, T0 + HOUR)).toMatchObject([{ way: 'webhook', attempts: 1 }])
      // A clock that went back by more than the longest wait lets it go at once.
      expect(await own(site, T0 - 24 * HOUR)).toHaveLength(1)
      // What is done stays done.
      await store.alerts.attempted(mail!.num, { state: 'waiting', at: T0, nextAt: T0, error: 'late' })
      const { items } = await store.alerts.deliveries(site, { limit: 10 })
      expect(items.map(({ way, state, error }) => [way, state, error])).toEqual([
        ['webhook', 'waiting', 'answered 503'],
        ['email', 'sent', null],
      ])
    })

    it('forget what is over and told, never what lasts or waits', async () => {
      const site = await newSite()
      for (const id of ['s4-waits', 's4-told', 's4-lasts']) await store.alerts.change(site, telling(site, matter(id)))
      const told = (await store.alerts.deliveries(site, { limit: 10 })).items.filter(
        ({ matters }) => matters[0] !== 's4-waits',
      )
      for (const { num } of told) await store.alerts.attempted(num, { state: 'sent', at: T0 })
      const close = ['s4-waits', 's4-told'].map((id) => ({ id, at: T0 }))
      await store.alerts.change(site, { open: [], close, messages: [] })
      await store.alerts.forgetAlertsBefore(T0 + HOUR)
      expect((await store.alerts.mattersSince(site, 0)).map(({ id }) => id)).toEqual(['s4-waits', 's4-lasts'])
      expect(await own(site)).toHaveLength(2)
    })

    it('go with their site, settings and refusals too', async () => {
      const site = await newSite()
      await store.alerts.change(site, telling(site, matter('s5-a')))
      await store.alerts.saveSettings(site, { settings: NO_ALERTS, secret: 'secret' }, ACT)
      await store.alerts.savePaces([
        { site, channel: 'rain', gapMs: 60_000 },
        { site: 'nowhere', channel: 'rain', gapMs: 1 },
      ])
      await store.messages.refuse(site, { topic: 't', why: 'w', at: T0, bytes: 1, sample: 's' })
      expect(await store.alerts.sitesWithSettings()).toContain(site)
      expect((await store.alerts.paces()).filter((one) => one.site === site)).toEqual([
        { site, channel: 'rain', gapMs: 60_000 },
      ])
      await store.deleteSite(site)
      expect(await own(site)).toEqual([])
      expect(await store.alerts.sitesWithSettings()).not.toContain(site)
      expect((await store.alerts.paces()).filter((one) => one.site === site)).toEqual([])
      await expect(store.messages.refused(site)).rejects.toEqual(code('no_such_site'))
    })

    it('keep the moment of the first settings, whatever is set later', async () => {
      const site = await newSite()
      await store.alerts.saveSettings(site, { settings: NO_ALERTS, secret: 'one' }, { by: 'Anna', at: T0 })
      const settings = { ...NO_ALERTS, email: { to: ['anna@bakery.example'] } }
      await store.alerts.saveSettings(site, { settings, secret: null }, { by: 'Bert', at: T0 + HOUR })
      expect(await store.alerts.settings(site)).toEqual({ settings, secret: null, since: T0 })
    })
  })
}
