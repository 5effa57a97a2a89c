import { beforeAll, describe, expect, it } from 'vitest'
import { Findings, type SiteSheet } from '../../../core/contract/index.ts'
import { findings } from '../../../core/findings/findings.ts'
import { bakeryWeek } from '../../../core/simulate/bakery.ts'
import { evidenceOf, type Simulated } from '../../../core/simulate/simulated.ts'
import type { Evidence } from '../../../core/timeline/evidence.ts'

let week: Simulated
let evidence: Evidence
let found: Findings

beforeAll(() => {
  week = bakeryWeek(Date.UTC(2026, 8, 21))
  evidence = evidenceOf(week, 'A')
  found = findings(evidence)
})

const first = (f: Findings): Findings['suspects'][number] => f.suspects[0]!

/** An empty bakery with one device and whatever is given. */
function bare(given: Partial<Evidence>): Evidence {
  const from = Date.UTC(2026, 8, 21)
  return {
    sheet: { ...week.sheet, channels: [] },
    rcd: 'A',
    from,
    to: from + 7 * 86_400_000,
    series: new Map(),
    trips: [],
    switchings: [],
    timetables: [],
    tests: [],
    remedies: [],
    ...given,
  }
}

describe('findings of the bakery', () => {
  it('keeps to the contract', () => {
    expect(Findings.parse(JSON.parse(JSON.stringify(found)))).toEqual(JSON.parse(JSON.stringify(found)))
  })

  it('names the planted cause, strongly, and not what the baker believes', () => {
    expect(first(found).of).toBe('load:defrost')
    expect(first(found).grade).toBe('strong')
    const mixer = found.suspects.find((s) => s.of === 'load:mixer')!
    expect(mixer.probability).toBeLessThan(0.2)
    expect(found.answer.text).toContain('Defrost heater')
  })

  it('is sorted by probability, and its shares add up to one with the unexplained', () => {
    const ps = found.suspects.map((s) => s.probability)
    expect(ps).toEqual([...ps].sort((a, b) => b - a))
    expect(found.suspects.reduce((sum, s) => sum + s.share, 0)).toBeCloseTo(1, 4)
  })

  it('gives the same bytes for the same evidence, in whatever order records come', () => {
    const turned: Evidence = {
      ...evidence,
      series: new Map([...evidence.series].reverse()),
      trips: [...evidence.trips].reverse(),
      switchings: [...evidence.switchings].reverse(),
      tests: [...evidence.tests].reverse(),
    }
    expect(JSON.stringify(findings(turned))).toBe(JSON.stringify(found))
  })

  it('is not moved by a circuit that never does anything', () => {
    const sheet: SiteSheet = structuredClone(week.sheet)
    sheet.rcds[0]!.circuits.push({ ref: 'spare', isolation: 'single-pole', loads: [] })
    const more = findings({ ...evidence, sheet })
    for (const s of found.suspects.filter((x) => x.grade !== 'unjudged')) {
      expect(more.suspects.find((x) => x.of === s.of)!.probability).toBe(s.probability)
    }
    expect(more.suspects.find((s) => s.of === 'circuit:spare')!.grade).toBe('unjudged')
  })

  it('follows a renamed load', () => {
    const sheet: SiteSheet = JSON.parse(JSON.stringify(week.sheet).replaceAll('"defrost"', '"melt"'))
    const renamed = findings({ ...evidence, sheet })
    expect(first(renamed).of).toBe('load:melt')
    expect(first(renamed).probability).toBeCloseTo(first(found).probability, 6)
  })

  it('does not change when the whole story happens four weeks later in the same summer time', () => {
    const ms = -28 * 86_400_000
    const shift = <T extends object>(body: T): T =>
      Object.fromEntries(
        Object.entries(body).map(([k, v]) => [
          k,
          ['at', 'after', 'before', 'restoredAt', 'from', 'until'].includes(k) ? v + ms : v,
        ]),
      ) as T
    const moved = findings({
      ...evidence,
      from: evidence.from + ms,
      to: evidence.to + ms,
      series: new Map([...evidence.series].map(([ref, s]) => [ref, { t: s.t.map((t) => t + ms), v: s.v }])),
      trips: evidence.trips.map(shift),
      switchings: evidence.switchings.map(shift),
      tests: evidence.tests.map(shift),
    })
    expect(first(moved).of).toBe('load:defrost')
    expect(moved.headroom).toEqual(found.headroom)
    expect(moved.trips.map((t) => t.course)).toEqual(found.trips.map((t) => t.course))
  })
})

describe('too little data', () => {
  it('is an answer when nothing was recorded', () => {
    const nothing = findings(bare({}))
    expect(nothing.answer.text).toMatch(/^No trip/)
    expect(nothing.suspects.at(0)?.of).toBe('none')
    expect(nothing.headroom.standingMa).toBeNull()
  })

  it('stays far from certain with one trip and no log', () => {
    const at = Date.UTC(2026, 8, 23, 4)
    const one = findings(bare({ trips: [{ id: 't1', rcd: 'A', at, restoredAt: at + 600_000 }] }))
    expect(one.suspects.every((s) => s.grade !== 'strong')).toBe(true)
    expect(one.answer.text).toMatch(/not enough to say/)
  })

  it('refuses a device that the sheet does not have', () => {
    expect(() => findings(bare({ rcd: 'Z' }))).toThrow(expect.objectContaining({ code: 'unknown_reference' }))
  })
})
