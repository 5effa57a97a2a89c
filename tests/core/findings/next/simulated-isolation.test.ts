import { describe, expect, it } from 'vitest'
import type { CauseSet } from '../../../../core/findings/likely-sets.ts'
import { bestIsolations } from '../../../../core/findings/next/best-isolations.ts'
import type { Site } from '../../../../core/findings/next/isolations.ts'
import { SETTLED } from '../../../../core/findings/next/trial.ts'
import { gammaPoisson, predictivePmf } from '../../../../core/statistics/gamma-poisson.ts'
import { seededRandom } from '../../../../core/statistics/random.ts'
import type { Thing } from '../../../../core/timeline/timeline.ts'
import { HOUR, loadOn, START, timelineOf } from '../timeline-of.ts'

const END = START + 168 * HOUR
const N = 12
const belief = gammaPoisson(N, 168)

const thing = (of: string, circuit: string): Thing => ({
  ...loadOn(circuit, [[START, END]], START, END),
  of,
  kind: of.startsWith('circuit:') ? 'circuit' : 'load',
  ref: of.slice(of.indexOf(':') + 1),
  circuit,
  isolation: 'single-pole',
})
const things = [
  thing('circuit:1', '1'),
  thing('load:mixer', '1'),
  thing('circuit:2', '2'),
  thing('load:sign', '2'),
  thing('circuit:3', '3'),
  thing('load:freezer', '3'),
]
const site: Site = {
  timeline: timelineOf({ things }),
  things: new Map(things.map((t) => [t.of, t])),
  circuits: ['1', '2', '3'],
  standing: new Map(),
  carriers: new Map([['rain', '3']]),
}
/** A posterior with single causes, two together, rain behind one circuit, and none at all. */
const sets: readonly CauseSet[] = [
  { of: ['load:mixer'], weight: 0.3, expected: [11] },
  { of: ['load:sign'], weight: 0.2, expected: [12] },
  { of: ['load:mixer', 'load:sign'], weight: 0.1, expected: [7, 5] },
  { of: ['rain'], weight: 0.15, expected: [10] },
  { of: ['device'], weight: 0.05, expected: [12] },
  { of: [], weight: 0.2, expected: [] },
]

/** What happens when `of` is isolated while this set is the truth: chances of what goes on, worked out by hand for this board. */
function worlds(set: CauseSet, of: readonly string[]): { chance: number; guilty: boolean; left: number }[] {
  const isolated = (suspect: string): number => {
    const circuit = site.things.get(suspect)?.circuit
    if (of.includes(suspect) || (circuit !== undefined && of.includes(`circuit:${circuit}`))) return 1
    return suspect === 'rain' && of.includes('circuit:3') ? 0.9 : 0
  }
  let list = [{ chance: 1, guilty: false, left: 1 }]
  set.of.forEach((suspect, i) => {
    const p = isolated(suspect)
    list = list.flatMap((w) => [
      { chance: w.chance * p, guilty: true, left: w.left - set.expected[i]! / N },
      { chance: w.chance * (1 - p), guilty: w.guilty, left: w.left },
    ])
  })
  return list.filter((w) => w.chance > 0)
}

describe('an isolation, simulated', () => {
  const proposals = bestIsolations(site, sets, N, belief, 3)

  it('is proposed', () => {
    expect(proposals.length).toBeGreaterThanOrEqual(2)
    expect(proposals[0]!.trial.settles).toBeGreaterThanOrEqual(0.9)
  })

  it.each(proposals.map((p) => [p.isolation.of.join(' + '), p] as const))('%s settles as often as it says', (_, p) => {
    const hours = 24 * p.days
    const all = sets.flatMap((set) => worlds(set, p.isolation.of).map((w) => ({ ...w, chance: w.chance * set.weight })))
    const posterior = (k: number): number => {
      let [guilty, total] = [0, 0]
      for (const w of all) {
        // the chance of k trips by the negative binomial of the time that counts
        const chance = w.chance * (w.left < 1e-9 ? Number(k === 0) : predictivePmf(belief, w.left * hours, k))
        total += chance
        if (w.guilty) guilty += chance
      }
      return guilty / total
    }
    const random = seededRandom(`simulated ${p.isolation.of.join()}`)
    let settled = 0
    const runs = 3_000
    for (let run = 0; run < runs; run++) {
      let u = random.uniform()
      const truth = all.find((w) => {
        u -= w.chance
        return u < 0
      })
      // Gamma(12.5) as a sum of exponentials and half a squared normal
      let rate = random.normal() ** 2 / 2
      for (let k = 0; k < N; k++) rate += random.exponential()
      const trips = random.poisson((rate / belief.rate) * Math.max(0, (truth ?? all.at(-1)!).left) * hours)
      const after = posterior(trips)
      if (after >= SETTLED || after <= 1 - SETTLED) settled++
    }
    // 3,000 runs: a standard error of at most 0.01; left shares are rounded to a two-hundredth.
    expect(Math.abs(settled / runs - p.trial.settles)).toBeLessThan(0.035)
  })

  it('does not depend on what things are called', () => {
    const rename = (of: string): string => of.replace('mixer', 'kneader').replace('sign', 'lamp')
    const renamed = things.map((t) => ({ ...t, of: rename(t.of), ref: rename(t.ref) }))
    const found = bestIsolations(
      { ...site, things: new Map(renamed.map((t) => [t.of, t])), timeline: timelineOf({ things: renamed }) },
      sets.map((s) => ({ ...s, of: s.of.map(rename) })),
      N,
      belief,
      3,
    )
    expect(found.map((p) => [p.isolation.of.map(String), p.days, p.trial.settles])).toEqual(
      proposals.map((p) => [p.isolation.of.map(rename), p.days, expect.closeTo(p.trial.settles, 9)]),
    )
  })
})
