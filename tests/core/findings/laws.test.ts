import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { Findings } from '../../../core/contract/findings.ts'
import type { SiteSheet } from '../../../core/contract/site-sheet.ts'
import { findings } from '../../../core/findings/findings.ts'
import type { Evidence } from '../../../core/timeline/evidence.ts'
import { DAY, LAW_SEEDS, madeSite, movedBy } from './laws-site.ts'

// Each case asks for findings of a whole week once or twice; a few cases for each law are what the time allows.
const FEW = { numRuns: 2 }
const site = fc.constantFrom(...LAW_SEEDS)
/** Zones that never change their clocks, with their hours ahead of UTC. */
const ZONES = [
  ['UTC', 0],
  ['Asia/Tokyo', 9],
  ['Africa/Nairobi', 3],
  ['Asia/Kathmandu', 5.75],
  ['America/Phoenix', -7],
  ['Asia/Kolkata', 5.5],
] as const
const HOURS_AHEAD = 5.5

const bytes = (found: Findings): string => JSON.stringify(found)

/** Findings with every instant moved by `ms`, and dates in texts masked. */
function instantsMoved(found: Findings, ms: number): unknown {
  return JSON.parse(JSON.stringify(found), (_, value: unknown) => {
    if (typeof value !== 'string') return value
    if (/^\d{4}-\d\d-\d\dT[\d:.]+Z$/.test(value)) return Date.parse(value) + ms
    return value.replace(/\b\d{1,2} (Jan|Feb|Mar|Apr|May|Jun|Jul|Aug|Sep|Oct|Nov|Dec)\b/g, 'DATE')
  })
}

/** Probability by suspect, without those that nothing is known of. */
function odds(found: Findings): Record<string, number> {
  return Object.fromEntries(
    found.suspects.filter((s) => s.grade !== 'unjudged').map(({ of, probability }) => [of, probability]),
  )
}

const shuffled = <T>(list: readonly T[]): fc.Arbitrary<T[]> =>
  fc.shuffledSubarray([...list], { minLength: list.length, maxLength: list.length })

describe('findings', () => {
  it('are the same bytes for the same evidence, and leave it alone', () => {
    for (const seed of LAW_SEEDS) {
      const { evidence, found } = madeSite(seed)
      const before = structuredClone(evidence)
      expect(bytes(findings(evidence))).toBe(bytes(found))
      expect(evidence).toEqual(before)
    }
  })

  it('do not ask in which order records were posted', () => {
    const cases = site.chain((seed) => {
      const { evidence } = madeSite(seed)
      return fc.record({
        seed: fc.constant(seed),
        trips: shuffled(evidence.trips),
        switchings: shuffled(evidence.switchings),
        tests: shuffled(evidence.tests),
        series: shuffled([...evidence.series]),
      })
    })
    fc.assert(
      fc.property(cases, ({ seed, series, ...records }) => {
        const { evidence, found } = madeSite(seed)
        expect(bytes(findings({ ...evidence, ...records, series: new Map(series) }))).toBe(bytes(found))
      }),
      FEW,
    )
  })

  it('do not ask which ids the store gave', () => {
    fc.assert(
      fc.property(site, fc.integer({ min: 1, max: 1_000 }), (seed, salt) => {
        const { evidence, found } = madeSite(seed)
        const n = evidence.trips.length
        const other = (i: number): string =>
          `t${String((salt * 7_919 + (n - i) * 104_729) % 1_000_003).padStart(7, '0')}`
        const ids = new Map(evidence.trips.map(({ id }, i) => [id, other(i)]))
        const trips = evidence.trips.map((trip) => ({ ...trip, id: ids.get(trip.id)! }))
        const renamed = bytes(found).replace(/"(trip-\d+)"/g, (_, id: string) => `"${ids.get(id)}"`)
        expect(bytes(findings({ ...evidence, trips }))).toBe(renamed)
      }),
      FEW,
    )
  })

  it('do not ask into how many pieces the time in one state is cut', () => {
    const shares = fc.array(fc.double({ min: 0.01, max: 0.99, noNaN: true }), { minLength: 1, maxLength: 5 })
    fc.assert(
      fc.property(site, shares, (seed, cuts) => {
        const { evidence, found } = madeSite(seed)
        // the same state written down again says nothing new
        const again = evidence.switchings.flatMap((switching, i) => {
          const end = evidence.switchings[i + 1]?.at ?? evidence.to
          return cuts.map((share, k) => ({
            ...switching,
            id: `${switching.id}-${k}`,
            at: Math.round(switching.at + share * (end - switching.at)),
          }))
        })
        const switchings = [...evidence.switchings, ...again].sort((a, b) => a.at - b.at)
        expect(bytes(findings({ ...evidence, switchings }))).toBe(bytes(found))
      }),
      // the last moment of a circuit's rest may lie at a fall of the level, which it must not explain
      { ...FEW, examples: [[1, [0.01, 0.99]]] },
    )
  })

  it('move with the calendar, whole weeks at a time', () => {
    const weeks = fc.integer({ min: -150, max: 150 })
    fc.assert(
      fc.property(site, weeks, (seed, count) => {
        const { evidence, found } = madeSite(seed)
        const ms = 7 * count * DAY
        expect(instantsMoved(findings(movedBy(evidence, ms)), -ms)).toEqual(instantsMoved(found, 0))
      }),
      FEW,
    )
  })

  it('are the same wherever the same clocks show the same hours', () => {
    fc.assert(
      fc.property(site, fc.constantFrom(...ZONES), (seed, [timeZone, hours]) => {
        const { evidence, found } = madeSite(seed)
        const ms = (HOURS_AHEAD - hours) * 3_600_000
        const moved = { ...movedBy(evidence, ms), sheet: { ...evidence.sheet, timeZone } }
        expect(instantsMoved(findings(moved), -ms)).toEqual(instantsMoved(found, 0))
      }),
      FEW,
    )
  })

  it('give every other suspect the same probability when a circuit, load or device that does nothing is added', () => {
    const adding = fc.record({
      position: fc.nat(3),
      load: fc.constantFrom('none', 'never runs', 'always runs', 'nobody knows'),
      device: fc.boolean(),
    })
    fc.assert(
      fc.property(site, adding, (seed, { position, load, device }) => {
        const { evidence, found } = madeSite(seed)
        const sheet = structuredClone(evidence.sheet)
        const loads = load === 'none' ? [] : [{ ref: 'spare-load' }]
        sheet.rcds[0]!.circuits.splice(position, 0, { ref: 'spare', isolation: 'single-pole', loads })
        if (device) sheet.rcds.push({ ref: 'B', ratedMa: 30, type: 'A', delay: 'general', circuits: [] })
        const series = new Map(evidence.series)
        if (load.endsWith('runs')) {
          sheet.channels.push({ ref: 'spare-runs', quantity: 'running', load: 'spare-load' })
          const { t } = [...series].find(([ref]) => ref.endsWith('-runs'))![1]
          series.set('spare-runs', { t, v: new Float64Array(t.length).fill(load === 'always runs' ? 1 : 0) })
        }
        const more = findings({ ...evidence, sheet, series })
        expect(odds(more)).toEqual(odds(found))
        for (const of of ['circuit:spare', 'load:spare-load']) {
          expect(more.suspects.find((s) => s.of === of)?.grade ?? 'unjudged').toBe('unjudged')
        }
      }),
      FEW,
    )
  })

  it('call things as they are called', () => {
    const name = fc.stringMatching(/^[A-Za-z0-9][A-Za-z0-9._-]{0,11}$/)
    const names = fc.uniqueArray(name, { minLength: 40, maxLength: 40 })
    fc.assert(
      fc.property(site, names, (seed, fresh) => {
        const { evidence, found } = madeSite(seed)
        const { renamed, called } = renaming(evidence, fresh)
        const other = findings(renamed)
        const expected = Object.entries(odds(found)).map(([of, p]) => [called(of), p] as const)
        const given = odds(other)
        expect(Object.keys(given).sort()).toEqual(expected.map(([of]) => of).sort())
        for (const [of, p] of expected) expect(given[of]).toBeCloseTo(p, 6)
        expect(other.headroom).toEqual(found.headroom)
        expect(other.budget.map(({ of, ma }) => [of, ma])).toEqual(found.budget.map(({ of, ma }) => [called(of), ma]))
        expect(other.trips.map((t) => [t.course, t.trigger])).toEqual(
          found.trips.map((t) => [t.course, t.trigger === null ? null : called(t.trigger)]),
        )
      }),
      FEW,
    )
  })

  it('do not ask in which order the sheet lists things', () => {
    fc.assert(
      fc.property(site, fc.nat(5), (seed, turns) => {
        const { evidence, found } = madeSite(seed)
        const turned = <T>(list: readonly T[]): T[] => list.map((_, i) => list[(i + turns) % list.length]!).reverse()
        const sheet: SiteSheet = {
          ...evidence.sheet,
          channels: turned(evidence.sheet.channels),
          rcds: evidence.sheet.rcds.map((rcd) => ({
            ...rcd,
            circuits: turned(rcd.circuits).map((circuit) => ({ ...circuit, loads: turned(circuit.loads) })),
          })),
        }
        const other = findings({ ...evidence, sheet })
        const given = odds(other)
        // ties decide which suspects go on to sets of three: a matter of some parts in 10,000
        for (const [of, p] of Object.entries(odds(found))) expect(Math.abs(given[of]! - p)).toBeLessThan(5e-4)
        expect(other.headroom).toEqual(found.headroom)
        expect(other.trips.map((t) => [t.course, t.trigger])).toEqual(found.trips.map((t) => [t.course, t.trigger]))
      }),
      FEW,
    )
  })
})

/** Evidence under other names, and how a suspect is called there. */
function renaming(
  evidence: Evidence,
  fresh: readonly string[],
): { readonly renamed: Evidence; readonly called: (of: string) => string } {
  const { sheet } = evidence
  const refs = [
    ...sheet.rcds.flatMap((rcd) => [rcd, ...rcd.circuits, ...rcd.circuits.flatMap((c) => c.loads)]),
    ...sheet.channels,
  ].map(({ ref }) => ref)
  const names = new Map(refs.map((ref, i) => [ref, fresh[i]!]))
  const to = (ref: string): string => names.get(ref)!
  const called = (of: string): string => {
    const [kind, ref] = of.split(':') as [string, string?]
    return ref === undefined ? of : `${kind}:${to(ref)}`
  }
  const renamed: Evidence = {
    ...evidence,
    rcd: to(evidence.rcd),
    sheet: {
      ...sheet,
      rcds: sheet.rcds.map((rcd) => ({
        ...rcd,
        ref: to(rcd.ref),
        circuits: rcd.circuits.map((circuit) => ({
          ...circuit,
          ref: to(circuit.ref),
          loads: circuit.loads.map((load) => ({ ...load, ref: to(load.ref) })),
        })),
      })),
      channels: sheet.channels.map((channel) => ({
        ...channel,
        ref: to(channel.ref),
        ...(channel.rcd === undefined ? {} : { rcd: to(channel.rcd) }),
        ...(channel.circuit === undefined ? {} : { circuit: to(channel.circuit) }),
        ...(channel.load === undefined ? {} : { load: to(channel.load) }),
      })),
    },
    series: new Map([...evidence.series].map(([ref, series]) => [to(ref), series])),
    trips: evidence.trips.map((trip) => ({
      ...trip,
      rcd: to(trip.rcd),
      ...(trip.running === undefined ? {} : { running: trip.running.map(called) }),
    })),
    switchings: evidence.switchings.map((switching) => ({ ...switching, of: called(switching.of) })),
    tests: evidence.tests.map((test) =>
      'rcd' in test ? { ...test, rcd: to(test.rcd) } : { ...test, of: called(test.of) },
    ),
  }
  return { renamed, called }
}
