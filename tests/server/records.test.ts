import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { RemedyOut, SwitchingOut, TestOut, TimetableOut, TripOut } from '../../core/contract/index.ts'
import { type Harness, startHarness } from './harness.ts'

const AT = '2026-09-21T02:14:05Z'

/** The contract's own examples, and what each field is answered as. */
const KINDS = [
  [
    'trips',
    { rcd: 'A', at: AT, restoredAt: '2026-09-21T08:40:00+02:00', note: 'again', running: ['load:mixer'] },
    { rcd: 'A', at: AT, restoredAt: '2026-09-21T06:40:00Z', note: 'again', running: ['load:mixer'] },
    TripOut,
  ],
  [
    'trips',
    { rcd: 'A', after: '2026-09-21T22:30:00Z', before: '2026-09-22T06:40:00Z' },
    { rcd: 'A', after: '2026-09-21T22:30:00Z', before: '2026-09-22T06:40:00Z' },
    TripOut,
  ],
  [
    'switchings',
    { changes: [{ of: 'circuit:7', at: AT, on: false }] },
    { of: 'circuit:7', at: AT, on: false },
    SwitchingOut,
  ],
  [
    'timetables',
    { of: 'load:mixer', onBetween: ['02:00', '05:00'], days: ['mon', 'tue'] },
    { of: 'load:mixer', onBetween: ['02:00', '05:00'], days: ['mon', 'tue'] },
    TimetableOut,
  ],
  [
    'tests',
    {
      kind: 'insulation',
      of: 'circuit:7',
      between: 'live-earth',
      testVolts: 500,
      megohms: 1.9,
      atLeast: false,
      loadsConnected: true,
      surgePartsConnected: false,
      at: AT,
    },
    { kind: 'insulation', megohms: 1.9, loadsConnected: true, at: AT },
    TestOut,
  ],
  ['tests', { kind: 'ramp', rcd: 'A', tripMa: 23.5, at: AT }, { kind: 'ramp', tripMa: 23.5 }, TestOut],
  [
    'tests',
    { kind: 'clamp', rcd: 'A', ma: 9.8, off: ['circuit:7'], at: AT },
    { kind: 'clamp', off: ['circuit:7'] },
    TestOut,
  ],
  [
    'remedies',
    { at: AT, of: 'load:mixer', done: 'unplugged', note: 'for good' },
    { at: AT, of: 'load:mixer', done: 'unplugged', note: 'for good' },
    RemedyOut,
  ],
] as const

describe('records', () => {
  let h: Harness
  let site: string
  beforeAll(async () => {
    h = await startHarness()
  })
  beforeEach(async () => {
    site = await h.makeSite()
  })
  afterAll(() => h.close())

  it.each(KINDS)('%s are kept once, read, corrected and taken back', async (path, body, answered, schema) => {
    const collection = `/sites/${site}/${path}`
    const posted = await h.call('POST', collection, body)
    expect(posted.statusCode).toBe(201)
    const { ids, ...counts } = posted.json()
    expect(counts).toEqual({ stored: 1, repeated: 0 })
    const again = await h.call('POST', collection, body)
    expect(again.statusCode).toBe(200)
    expect(again.json()).toEqual({ stored: 0, repeated: 1, ids })

    const item = `${collection}/${ids[0]}`
    const read = await h.call('GET', item)
    expect(schema.parse(read.json())).toMatchObject({ ...answered, id: ids[0], recordedBy: 'owner', corrections: 0 })
    const list = (await h.call('GET', `${collection}?from=2026-09-01T00:00:00Z&to=2026-10-01T00:00:00Z`)).json()
    expect(list).toEqual({ items: [read.json()], next: null })

    h.clock.now += 60_000
    const changed = await h.call('PATCH', item, { note: 'corrected' })
    expect(changed.json()).toMatchObject({ ...answered, note: 'corrected', corrections: 1 })
    expect((await h.call('PATCH', item, { note: 'corrected' })).json()).toMatchObject({ corrections: 1 })
    const { items } = (await h.call('GET', `${item}/corrections`)).json()
    expect(items).toHaveLength(1)
    expect(items[0]).toMatchObject({
      at: new Date(h.clock.now).toISOString().replace('.000', ''),
      by: 'owner',
      action: 'changed',
      before: answered,
    })

    expect((await h.call('DELETE', item, '')).statusCode).toBe(204)
    expect((await h.call('GET', item)).statusCode).toBe(404)
    expect((await h.call('DELETE', item)).statusCode).toBe(404)
    expect((await h.call('GET', `${item}/corrections`)).json().items.at(-1)).toMatchObject({ action: 'deleted' })
  })

  it('are taken as a list whole or not at all', async () => {
    const list = [
      { rcd: 'A', at: AT },
      { rcd: 'Z', at: AT },
      { rcd: 'A', at: 'yesterday' },
    ]
    const refused = await h.call('POST', `/sites/${site}/trips`, list)
    expect(refused.statusCode).toBe(422)
    expect(refused.json().issues).toEqual([
      { path: '/1/rcd', why: 'there is no rcd "Z" on the sheet of this site' },
      { path: '/2/at', why: 'not an RFC 3339 time' },
    ])
    expect((await h.call('GET', `/sites/${site}/trips`)).json().items).toEqual([])
    const kept = await h.call('POST', `/sites/${site}/trips`, list.slice(0, 1))
    expect(kept.json()).toMatchObject({ stored: 1 })
  })

  it.each([
    ['trips', { rcd: 'A' }, '/at'],
    ['trips', { rcd: 'A', at: AT, before: AT }, '/at'],
    ['trips', { rcd: 'A', after: '2026-09-22T00:00:00Z', before: '2026-09-21T00:00:00Z' }, '/before'],
    ['trips', { rcd: 'A', at: AT, restoredAt: '2026-09-20T00:00:00Z' }, '/restoredAt'],
    ['trips', { rcd: 'A', at: '2026-09-21T02:14:05' }, '/at'],
    ['trips', { rcd: 'A', at: '1999-12-31T23:59:59Z' }, '/at'],
    ['trips', { rcd: 'A', at: '2100-01-01T00:00:00Z' }, '/at'],
    ['trips', { rcd: 'A', at: AT, running: ['load:ghost'] }, '/running/0'],
    ['switchings', { changes: [{ of: 'circuit:9', at: AT, on: true }] }, '/changes/0/of'],
    ['switchings', { changes: 5 }, '/changes'],
    ['switchings', { of: 'circuit:7', at: AT, on: 'yes' }, '/on'],
    ['timetables', { of: 'load:mixer', onBetween: ['2:00', '05:00'] }, '/onBetween/0'],
    ['tests', { kind: 'guess', at: AT }, '/kind'],
    ['tests', { kind: 'ramp', rcd: 'A', tripMa: -1, at: AT }, '/tripMa'],
    ['tests', { kind: 'clamp', rcd: 'A', ma: 1, off: ['load:ghost'], at: AT }, '/off/0'],
    ['remedies', { at: AT, rcd: 'Z', done: 'x' }, '/rcd'],
    ['remedies', { at: AT }, '/done'],
  ])('%s like %j are refused at %s', async (path, body, place) => {
    const refused = await h.call('POST', `/sites/${site}/${path}`, body)
    expect(refused.statusCode).toBe(422)
    expect(refused.json().issues.map((issue: { path: string }) => issue.path)).toContain(place)
    expect(refused.json().detail).toContain('Nothing was stored')
  })

  it('are checked as a whole after a change', async () => {
    const { ids } = (await h.call('POST', `/sites/${site}/trips`, { rcd: 'A', at: AT })).json()
    const item = `/sites/${site}/trips/${ids[0]}`
    expect((await h.call('PATCH', item, { restoredAt: '2026-09-01T00:00:00Z' })).statusCode).toBe(422)
    expect((await h.call('PATCH', item, { rcd: 'Z' })).json().detail).toContain('Nothing was changed')
    const window = { at: null, after: '2026-09-21T00:00:00Z', before: '2026-09-21T03:00:00Z' }
    const changed = (await h.call('PATCH', item, window)).json()
    expect(changed).toMatchObject({ after: window.after, before: window.before })
    expect(changed).not.toHaveProperty('at')
  })

  it('name overlapping outages of one device, and keep them', async () => {
    const trip = (at: string, restoredAt: string, rcd = 'A') => ({
      rcd,
      at: `2026-09-21T${at}Z`,
      restoredAt: `2026-09-21T${restoredAt}Z`,
    })
    const first = (await h.call('POST', `/sites/${site}/trips`, trip('02:00:00', '06:00:00'))).json()
    const posted = await h.call('POST', `/sites/${site}/trips`, [
      trip('03:00:00', '05:00:00'),
      trip('06:00:00', '07:00:00'),
      trip('03:00:00', '05:00:00', 'B'),
    ])
    expect(posted.statusCode).toBe(201)
    const { notes, ids } = posted.json()
    expect(notes).toHaveLength(1)
    expect(notes[0]).toContain(ids[0])
    expect(notes[0]).toContain(first.ids[0])
  })

  it('page in order of time', async () => {
    const trips = Array.from({ length: 25 }, (_, i) => ({
      rcd: 'A',
      at: Date.UTC(2026, 8, 1) + ((i * 7) % 25) * 3_600_000,
    }))
    await h.call('POST', `/sites/${site}/trips`, trips)
    const seen: string[] = []
    for (let after = ''; ; ) {
      const page = (await h.call('GET', `/sites/${site}/trips?limit=10${after}`)).json()
      seen.push(...page.items.map(({ at }: { at: string }) => at))
      if (page.next === null) break
      after = `&after=${encodeURIComponent(page.next)}`
    }
    expect(seen).toHaveLength(25)
    expect(seen).toEqual(seen.toSorted())
    const part = await h.call('GET', `/sites/${site}/trips?from=2026-09-01T05:00:00Z&to=2026-09-01T07:00:00Z`)
    expect(part.json().items).toHaveLength(2)
  })
})
