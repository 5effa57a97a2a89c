import { encode } from 'cborg'
import fc from 'fast-check'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { SiteSheet } from '../../core/contract/index.ts'
import { takeSenml } from '../../server/intake/senml.ts'
import { CBOR_LABELS, readSenmlCbor } from '../../server/intake/senml-cbor.ts'
import { resolveSenml, type SenmlRecord } from '../../server/intake/senml-record.ts'
import type { Taken } from '../../server/intake/taken.ts'
import { BAKERY, type Harness, startHarness } from './harness.ts'

const sheet = SiteSheet.parse(BAKERY)
const NOW_MS = 1_790_000_500_000
const BT = 1_790_000_000
const take = (pack: unknown): Taken => takeSenml(pack, sheet, NOW_MS)
const columnsOf = ({ batches }: Taken): Record<string, [number, number][]> =>
  Object.fromEntries(batches.map(({ channel, t, v }) => [channel, [...t].map((at, i) => [at, v[i]!])]))
const whysOf = (taken: Taken): string[] => taken.refusals.listed.map(({ index, why }) => `${index} ${why}`)

// The example of RFC 8428, section 6, in CBOR (from memory; the structure is that of section 5.1.2 in JSON).
const RFC_CBOR = [
  '87a721781b75726e3a6465763a6f773a3130653230373361303130383030363a',
  '22fb41d303a15b00106223614120050067766f6c7461676501615602fb405e066666666666',
  'a3006763757272656e74062402fb3ff3333333333333',
  'a3006763757272656e74062302fb3ff4cccccccccccd',
  'a3006763757272656e74062202fb3ff6666666666666',
  'a3006763757272656e74062102f93e00',
  'a3006763757272656e74062002fb3ff999999999999a',
  'a3006763757272656e74060002fb3ffb333333333333',
].join('')

describe('the examples of RFC 8428 (from memory)', () => {
  it('5.1.1, a single datapoint', () => {
    const pack = [{ n: 'urn:dev:ow:10e2073a01080063', u: 'Cel', v: 23.1 }]
    expect(resolveSenml(pack, NOW_MS)).toMatchObject([
      { name: 'urn:dev:ow:10e2073a01080063', unit: 'Cel', value: 23.1, seconds: NOW_MS / 1_000 },
    ])
  })

  it('5.1.3 and 5.1.4, multiple measurements and their resolved form', () => {
    const pack = [
      { bn: 'urn:dev:ow:10e2073a01080063', bt: 1.320067464e9, bu: '%RH', v: 20 },
      { u: 'lon', v: 24.30621 },
      { u: 'lat', v: 60.07965 },
      { t: 60, v: 20.3 },
      { u: 'lon', t: 60, v: 24.30622 },
    ]
    expect(resolveSenml(pack, NOW_MS).map(({ unit, seconds, value }) => [unit, seconds, value])).toEqual([
      ['%RH', 1.320067464e9, 20],
      ['lon', 1.320067464e9, 24.30621],
      ['lat', 1.320067464e9, 60.07965],
      ['%RH', 1.320067524e9, 20.3],
      ['lon', 1.320067524e9, 24.30622],
    ])
  })

  it('5.1.5, multiple data types', () => {
    const pack = [
      { bn: 'urn:dev:ow:10e2073a01080063:', n: 'temp', u: 'Cel', v: 23.1 },
      { n: 'label', vs: 'Machine Room' },
      { n: 'open', vb: false },
      { n: 'nfc-reader', vd: 'aGkgCg' },
    ]
    expect(resolveSenml(pack, NOW_MS).map(({ value, state, data }) => [value, state, data])).toEqual([
      [23.1, undefined, false],
      [undefined, 'Machine Room', false],
      [undefined, false, false],
      [undefined, undefined, true],
    ])
  })

  it('6, a pack in CBOR', () => {
    const pack = readSenmlCbor(Buffer.from(RFC_CBOR, 'hex')) as SenmlRecord[]
    expect(pack[0]).toEqual({
      bn: 'urn:dev:ow:10e2073a0108006:',
      bt: 1_276_020_076.001,
      bu: 'A',
      bver: 5,
      n: 'voltage',
      u: 'V',
      v: 120.1,
    })
    expect(resolveSenml(pack, NOW_MS).map(({ name, value }) => [name.slice(-7), value])).toEqual([
      ['voltage', 120.1],
      ...[1.2, 1.3, 1.4, 1.5, 1.6, 1.7].map((value) => ['current', value]),
    ])
  })
})

describe('times', () => {
  it('below 2^28 count from now, backwards and forwards; above they are instants', () => {
    const now = NOW_MS / 1_000
    const pack = [
      { n: 'a', t: -30, v: 1 },
      { n: 'a', v: 2 },
      { n: 'a', t: 2.5, v: 3 },
      { n: 'a', t: 2 ** 28, v: 4 },
    ]
    expect(resolveSenml(pack, NOW_MS).map(({ seconds }) => seconds)).toEqual([now - 30, now, now + 2.5, 2 ** 28])
  })

  it('say by "ut" when the next reading is due', () => {
    expect(take([{ n: 'tails-a', bt: BT, v: 1, ut: 60 }]).expected).toEqual(new Map([['tails-a', 60_000]]))
  })
})

describe('sums', () => {
  it('make the mean between two of them, at the later time', () => {
    const taken = take([
      { bn: 'clamp/', bt: BT, bs: 1_000, n: 'tails-a', u: 'mA', s: 0 },
      { n: 'tails-a', u: 'mA', t: 60, s: 774 },
      { n: 'tails-a', u: 'mA', t: 120, s: 1_560 },
    ])
    expect(columnsOf(taken)).toEqual({
      'tails-a': [
        [(BT + 60) * 1_000, 12.9],
        [(BT + 120) * 1_000, 13.1],
      ],
    })
    expect(taken).toMatchObject({ given: 2, refusals: { count: 0 } })
  })

  it('of a rain rate make the depth in between, in every unit of a rate', () => {
    const rain = (u: string, s: number): Taken =>
      take([
        { bt: BT, bu: u, n: 'rain', s: 7 },
        { n: 'rain', t: 900, s: 7 + s },
      ])
    // 0.4 mm within a quarter of an hour: a mean of 1.6 mm/h over 900 s.
    for (const [unit, sum] of [
      ['mm/h', 1_440],
      ['m/h', 1.44],
      ['m/s', 0.000_4],
    ] as const) {
      expect([unit, columnsOf(rain(unit, sum))]).toEqual([unit, { rain: [[(BT + 900) * 1_000, 0.4]] }])
    }
  })

  it('that stand alone, or go back in time, are refused', () => {
    const taken = take([
      { bt: BT, n: 'tails-a', s: 5 },
      { n: 'amps-7', t: 10, s: 1 },
      { n: 'amps-7', t: 5, s: 2 },
    ])
    expect(whysOf(taken)).toEqual([
      '2 sums of one name follow each other in time',
      expect.stringContaining('0 a sum makes a reading only together with an earlier sum'),
    ])
  })

  it('do not depend on where they count from', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 1_000_000 }), fc.integer({ min: 1, max: 5_000 }), (bs, step) => {
        const pack = [
          { bt: BT, bs, n: 'tails-a', s: 0 },
          { n: 'tails-a', t: 10, s: step },
        ]
        expect(columnsOf(take(pack))['tails-a']![0]![1]).toBeCloseTo(step / 10, 9)
      }),
    )
  })
})

describe('states, units and the rest', () => {
  it('takes words and booleans for running channels, and for no others', () => {
    const taken = take([
      { bt: BT, n: 'mixer-runs', vs: 'On' },
      { n: 'mixer-runs', t: 1, vs: 'off' },
      { n: 'mixer-runs', t: 2, vb: true },
      { n: 'mixer-runs', t: 3, vs: 'perhaps' },
      { n: 'tails-a', vb: true },
      { n: 'supply-a', vs: 'on' },
      { n: 'tails-a', vd: 'aGk' },
      { n: 'tails-a', v: 1, vs: 'two at once' },
    ])
    expect(columnsOf(taken)['mixer-runs']!.map(([, v]) => v)).toEqual([1, 0, 1])
    expect(taken.refusals.listed.map(({ index }) => index)).toEqual([3, 4, 5, 6, 7])
  })

  it('takes secondary units (RFC 8798) and the version that announces them (RFC 9100)', () => {
    const taken = take([
      { bver: 26, bt: BT, n: 'tails-a', u: 'mA', v: 12.9 },
      { n: 'amps-7', u: 'mA', v: 1_500 },
      { n: 'supply-a', u: 'mV', v: 231_000 },
      { n: 'rain', u: 'cm', v: 0.02 },
      { n: 'rh', u: '/100', v: 55 },
    ])
    expect(Object.values(columnsOf(taken)).map((column) => column[0]![1])).toEqual([12.9, 1.5, 231, 0.2, 55])
    for (const u of ['constructor', '__proto__', 'mm/h', 'W']) {
      expect(take([{ bt: BT, n: 'rain', u, v: 1 }]).refusals.count).toBe(1)
    }
    expect(whysOf(take([{ bt: BT, n: 'rain', u: 'mm/h', v: 1 }]))[0]).toContain('is a rate')
  })

  it('names at most twenty known channels, and little of an unknown name', () => {
    const channels = Array.from({ length: 30 }, (_, i) => ({ ref: `c${i}`, quantity: 'leakage' as const }))
    const wide = SiteSheet.parse({ ...BAKERY, channels })
    const [refused] = takeSenml([{ n: 'x'.repeat(200), bt: BT, v: 1 }], wide, NOW_MS).refusals.listed
    expect(refused!.why).toContain('c19 and 10 more')
    expect(refused!.why.length).toBeLessThan(300)
  })
})

describe('CBOR', () => {
  const labels = new Map([...CBOR_LABELS].map(([number, label]) => [label, number]))
  const asCbor = (pack: readonly object[]): Uint8Array =>
    encode(pack.map((record) => new Map(Object.entries(record).map(([label, v]) => [labels.get(label) ?? label, v]))))

  it('says what the same pack says in JSON', () => {
    const record = fc.record(
      {
        n: fc.constantFrom('tails-a', 'mixer-runs', 'amps-7', 'ghost'),
        u: fc.constantFrom('A', 'mA', 'V'),
        v: fc.double({ noNaN: true, noDefaultInfinity: true }),
        vb: fc.boolean(),
        t: fc.integer({ min: -1_000, max: 1_000 }),
        bt: fc.integer({ min: BT, max: BT + 1_000 }),
        s: fc.integer(),
        own: fc.string(),
      },
      { requiredKeys: ['n'] },
    )
    fc.assert(
      fc.property(fc.array(record, { maxLength: 8 }), (pack) => {
        expect(take(readSenmlCbor(asCbor(pack)))).toEqual(take(JSON.parse(JSON.stringify(pack))))
      }),
    )
  })

  it('takes decimal fractions, long and indefinite forms', () => {
    // [{0: "tails-a", 6: BT, 2: 4([-1, 129])}] with indefinite array and map.
    const hex = `9fbf00677461696c732d61061a${BT.toString(16)}02c4822018 81ffff`.replace(' ', '')
    expect(columnsOf(take(readSenmlCbor(Buffer.from(hex, 'hex'))))).toEqual({ 'tails-a': [[BT * 1_000, 12.9]] })
  })

  it.each([
    ['nothing', ''],
    ['cut off', RFC_CBOR.slice(0, -6)],
    ['followed by more', `${RFC_CBOR}00`],
    ['a map', 'a0'],
    ['a list of numbers', '8101'],
    ['an infinite value', '81a2006774 61696c732d6102f97c00'],
    ['a label twice', '81a3006774 61696c732d610001 0002'],
    ['a label by number and by name', '81a202016176 01'],
    ['a label that is a list', '81a1800 1'],
    ['an unknown tag', '81a10 2c101'],
    ['an endless announcement', '9bffffffffffffffff'],
    ['a nest deeper than any stack', '81'.repeat(200_000)],
  ])('is refused when it is %s', (_what, hex) => {
    expect(() => take(readSenmlCbor(Buffer.from(hex.replaceAll(' ', ''), 'hex')))).toThrow(
      expect.objectContaining({ name: 'Refused' }),
    )
  })

  it('is told by labels that must be understood in the form of text', () => {
    const bytes = encode([
      new Map<unknown, unknown>([
        [0, 'tails-a'],
        [2, 1],
        ['novel_', 1],
      ]),
    ])
    expect(() => take(readSenmlCbor(bytes))).toThrow(/must be understood/)
  })

  it('never makes more of random bytes than a refusal', () => {
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 60 }), (bytes) => {
        try {
          take(readSenmlCbor(bytes))
        } catch (error) {
          expect(error).toMatchObject({ name: 'Refused' })
        }
      }),
    )
  })
})

describe('over HTTP', () => {
  let h: Harness
  let site: string
  beforeAll(async () => {
    h = await startHarness()
    site = await h.makeSite()
  })
  afterAll(() => h.close())

  it.each(['senml', 'sensml'])('%s is taken in JSON and CBOR, and a repeat is a repeat', async (name) => {
    const offset = name === 'senml' ? 0 : 100
    const path = `/sites/${site}/readings`
    const json = [{ n: 'tails-a', t: BT + offset, v: 12.5 }]
    const cbor = Buffer.from(
      encode([
        new Map<unknown, unknown>([
          [0, 'tails-a'],
          [6, BT + offset],
          [2, 12.5],
        ]),
      ]),
    )
    const first = await h.call('POST', path, json, { headers: { 'content-type': `application/${name}+json` } })
    expect(first.json()).toMatchObject({ stored: 1 })
    const again = await h.call('POST', path, cbor, { headers: { 'content-type': `application/${name}+cbor` } })
    expect(again.json()).toMatchObject({ stored: 0, repeated: 1 })
  })

  it('broken CBOR is malformed', async () => {
    const answer = await h.call('POST', `/sites/${site}/readings`, Buffer.from('ff', 'hex'), {
      headers: { 'content-type': 'application/senml+cbor' },
    })
    expect(answer.statusCode).toBe(400)
    expect(answer.json().type).toBe('/problems/malformed-request')
  })
})
