import { describe, expect, it } from 'vitest'
import { readingsNews } from '../../web/api/live.ts'
import { apiPath } from '../../web/api/paths.ts'
import { figure, milliamps, odds, percent } from '../../web/format/numbers.ts'
import { readRoute, sheetAddress } from '../../web/route/route.ts'
import { words } from '../../web/words.ts'

const plain = (text: string): string => text.replaceAll('\u202f', ' ')

describe('figures in words', () => {
  it('carries units, and decimals by size', () => {
    expect([0.234, 12.94, 0.996, 150.2, -1.25].map(milliamps).map(plain)).toEqual([
      '0.23 mA',
      '12.9 mA',
      '1.0 mA',
      '150 mA',
      '−1.3 mA',
    ])
  })

  it('never says certain', () => {
    expect([0, 0.004, 0.05, 0.934, 0.996, 1].map(odds)).toEqual([
      'under 0.01',
      'under 0.01',
      '0.05',
      '0.93',
      'over 0.99',
      'over 0.99',
    ])
  })

  it('says small shares as small', () => {
    expect([0, 0.001, 0.47].map(percent).map(plain)).toEqual(['0 %', 'under 1 %', '47 %'])
  })

  it('reads any figure of a reason', () => {
    expect([null, true, 'Holm', 7, 0.00004, 11.257].map(figure)).toEqual([
      'not known',
      'yes',
      'Holm',
      '7',
      '0.000040',
      '11.26',
    ])
  })
})

describe('addresses', () => {
  it('writes what it reads', () => {
    const address = sheetAddress('site 1', 'A', Date.UTC(2026, 8, 21), Date.UTC(2026, 8, 28))
    const url = new URL(address, 'http://bakery.example')
    expect(readRoute(url.pathname, url.search)).toEqual({
      page: 'sheet',
      site: 'site 1',
      rcd: 'A',
      from: Date.UTC(2026, 8, 21),
      to: Date.UTC(2026, 8, 28),
    })
  })

  it('drops a period the wrong way round, and knows no other pages', () => {
    expect(readRoute('/sites/a', '?from=2&to=1')).toMatchObject({ from: null, to: null })
    expect(readRoute('/sites/a/b', '')).toEqual({ page: 'nowhere' })
    expect(readRoute('/report', '?rcd=A')).toEqual({ page: 'report', rcd: 'A' })
  })

  it('encodes what goes into an API path', () => {
    expect(apiPath(['sites', 'a/b'], { from: null, limit: 2 })).toBe('/sites/a%2Fb?limit=2')
  })
})

describe('live news', () => {
  it('reads what arrived, and survives what it cannot read', () => {
    expect(readingsNews('{"channel":"tails-a","from":1,"to":2,"stored":2}')).toEqual({
      kind: 'readings',
      channel: 'tails-a',
      to: 2,
    })
    expect(readingsNews('not JSON')).toEqual({ kind: 'readings', channel: '', to: null })
  })
})

describe('words for weather lanes', () => {
  it('says one temperature once, and no rain as none', () => {
    expect(words.strip.temperatureRange(16.1, 16.3)).toBe('16\u202f°C')
    expect(words.strip.temperatureRange(6.2, 18.4)).toBe('6 to 18\u202f°C')
    expect(words.strip.rainMost(0)).toBe('none')
    expect(words.strip.rainMost(3.1)).toBe('up to 3.1\u202fmm')
  })
})
