import { describe, expect, it } from 'vitest'
import { SiteSheet } from '../../core/contract/index.ts'
import { takeSenml } from '../../server/intake/senml.ts'
import { resolveSenml } from '../../server/intake/senml-record.ts'
import { BAKERY } from './harness.ts'

const sheet = SiteSheet.parse(BAKERY)
const NOW_MS = 1_276_020_100_000

describe('base values of a pack', () => {
  // Packs and resolved forms of RFC 8428, sections 5.1.2 and 5.1.3 (from memory: the numbers are those of the examples).
  it('are worked in as in RFC 8428, 5.1.2 (multiple datapoints)', () => {
    const pack = [
      { bn: 'urn:dev:ow:10e2073a01080063:', n: 'voltage', u: 'V', v: 120.1 },
      { n: 'current', u: 'A', v: 1.2 },
    ]
    const resolved = resolveSenml(pack, NOW_MS)
    expect(resolved.map(({ name, unit, value, seconds }) => [name, unit, value, seconds])).toEqual([
      ['urn:dev:ow:10e2073a01080063:voltage', 'V', 120.1, NOW_MS / 1_000],
      ['urn:dev:ow:10e2073a01080063:current', 'A', 1.2, NOW_MS / 1_000],
    ])
  })

  it('are worked in as in RFC 8428, 5.1.2 (base time and relative times)', () => {
    const pack = [
      { bn: 'urn:dev:ow:10e2073a0108006:', bt: 1.276020076001e9, bu: 'A', bver: 5, n: 'voltage', u: 'V', v: 120.1 },
      { n: 'current', t: -5, v: 1.2 },
      { n: 'current', t: -4, v: 1.3 },
      { n: 'current', v: 1.7 },
    ]
    expect(resolveSenml(pack, NOW_MS).map(({ seconds, unit, value }) => [seconds, unit, value])).toEqual([
      [1.276020076001e9, 'V', 120.1],
      [1.276020071001e9, 'A', 1.2],
      [1.276020072001e9, 'A', 1.3],
      [1.276020076001e9, 'A', 1.7],
    ])
  })

  it('may stand in a record of their own, and add to values', () => {
    const pack = [
      { bn: 'tails-', bv: 10, bt: 1.7e9 },
      { n: 'a', v: 2.5 },
    ]
    expect(resolveSenml(pack, NOW_MS)).toMatchObject([
      { index: 1, name: 'tails-a', seconds: 1.7e9, unit: undefined, value: 12.5 },
    ])
  })
})

describe('a pack as readings', () => {
  const take = (pack: unknown) => takeSenml(pack, sheet, NOW_MS)

  it('has its units converted and its names resolved', () => {
    const bt = 1_790_000_000
    const taken = take([
      { bn: 'urn:dev:mac:0024befffe804ff1:', bt, n: 'tails-a', u: 'A', v: 0.0129 },
      { n: 'tails-a', u: 'mA', t: 1.5, v: 13.1 },
      { n: 'amps-7', u: 'mA', v: 4_500 },
      { n: 'outdoor', u: 'K', v: 293.4 },
      { n: 'outdoor', u: 'Cel', t: 1, v: -3.5 },
      { n: 'rh', u: '/', v: 0.55 },
      { n: 'rain', u: 'm', v: 0.0002 },
      { n: 'supply-a', u: 'V', v: 231.2 },
      { n: 'mixer-runs', vb: true },
      { bn: '', n: 'leak-7', v: 1 },
    ])
    expect(taken.refusals.listed).toEqual([])
    const columns = Object.fromEntries(
      taken.batches.map(({ channel, t, v }) => [channel, [...t].map((at, i) => [at, v[i]])]),
    )
    expect(columns).toEqual({
      'tails-a': [
        [bt * 1_000, 12.9],
        [bt * 1_000 + 1_500, 13.1],
      ],
      'amps-7': [[bt * 1_000, 4.5]],
      outdoor: [
        [bt * 1_000, 20.25],
        [bt * 1_000 + 1_000, -3.5],
      ],
      rh: [[bt * 1_000, 55]],
      rain: [[bt * 1_000, 0.2]],
      'supply-a': [[bt * 1_000, 231.2]],
      'mixer-runs': [[bt * 1_000, 1]],
      'leak-7': [[bt * 1_000, 1]],
    })
  })

  it('has bad records refused one by one, unknown names with those that are known', () => {
    const taken = take([
      { bt: 1_790_000_000, n: 'ghost', v: 1 },
      { n: 'tails-a', u: 'Cel', v: 1 },
      { n: 'tails-a', vs: 'high' },
      { n: 'tails-a', s: 5 },
      { n: 'rh', v: 400 },
      { n: 'tails-a', v: 1 },
      { n: 'tails-a', t: 1e10, v: 1 },
    ])
    expect(taken.refusals.listed.map(({ index }) => index).sort()).toEqual([0, 1, 2, 3, 4, 6])
    expect(taken.refusals.listed[0]!.why).toContain('tails-a, leak-7')
    expect(taken.batches).toHaveLength(1)
  })

  it.each([
    ['no list', {}],
    ['a label that must be understood', [{ n: 'tails-a', v: 1, novel_: 1 }]],
    ['a later version', [{ bver: 11, n: 'tails-a', v: 1 }]],
    ['a value that is text', [{ n: 'tails-a', v: '1' }]],
    ['mixed versions', [{ bver: 5, n: 'tails-a', v: 1 }, { bver: 6 }]],
  ])('is refused when it is %s', (_what, pack) => {
    expect(() => take(pack)).toThrow(expect.objectContaining({ name: 'Refused' }))
  })
})
