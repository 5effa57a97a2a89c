import type { Thing, Timeline } from '../../timeline/timeline.ts'
import type { CauseSet } from '../likely-sets.ts'
import type { Case } from './trial.ts'

/** Sets of circuits that are tried: of so many of the likeliest, so many at a time. */
const LIKELIEST = 8
const MOST_TOGETHER = 4
/**
 * How often opening the line alone takes a fault away, when no insulation test tells: what leaks from the neutral, or through it, stays.
 * Judgement, no source.
 */
const LINE_SHARE = 0.8
/** Chance that a circuit whose own leakage rises with a suspect is the one that carries it. */
const CARRIED = 0.9

/** Circuits, or one load, to be isolated together. */
export interface Isolation {
  /** As `of` is written. */
  readonly of: readonly string[]
  /** References of the circuits that lose their supply; empty for a load. */
  readonly circuits: readonly string[]
}

/** What is needed to say which causes an isolation takes away. */
export interface Site {
  readonly timeline: Timeline
  readonly things: ReadonlyMap<string, Thing>
  readonly circuits: readonly string[]
  /** Share of the standing leakage of each circuit by reference; a circuit without a figure is absent. */
  readonly standing: ReadonlyMap<string, number>
  /** Circuits that carry a suspect of no known place, by the evidence: reference of the circuit by suspect. */
  readonly carriers: ReadonlyMap<string, string>
}

/** Every single circuit and load, and sets of two to four of the circuits that are likeliest to have a part. */
export function isolations(site: Site, sets: readonly CauseSet[]): Isolation[] {
  const list: Isolation[] = []
  const weight = new Map(site.circuits.map((ref) => [ref, 0]))
  for (const set of sets) {
    for (const of of set.of) {
      const thing = site.things.get(of)
      if (thing !== undefined) weight.set(thing.circuit, (weight.get(thing.circuit) ?? 0) + set.weight)
    }
  }
  for (const thing of site.things.values()) {
    list.push({ of: [thing.of], circuits: thing.kind === 'circuit' ? [thing.ref] : [] })
  }
  const likeliest = [...site.circuits]
    .sort((a, b) => weight.get(b)! - weight.get(a)! || (a < b ? -1 : 1))
    .slice(0, LIKELIEST)
    .sort()
  const grow = (chosen: readonly string[], next: number): void => {
    if (chosen.length > 1) list.push({ of: chosen.map((ref) => `circuit:${ref}`), circuits: chosen })
    if (chosen.length === MOST_TOGETHER) return
    for (let i = next; i < likeliest.length; i++) grow([...chosen, likeliest[i]!], i + 1)
  }
  grow([], 0)
  // all circuits together tell nothing of any of them
  return list.filter((i) => i.circuits.length < Math.max(2, site.circuits.length))
}

/**
 * The sets of causes as an isolation sees them. What hangs on no known circuit (a timer, a load nobody named, wet insulation) hangs on any
 * of them alike; the device itself and the supply on none. `bothPoles` false: only the lines are opened.
 */
export function casesOf(
  site: Site,
  isolation: Isolation,
  sets: readonly CauseSet[],
  trips: number,
  bothPoles: boolean,
): Case[] {
  const merged = new Map<string, { weight: number; guilty: boolean; left: number }>()
  const add = (weight: number, guilty: boolean, left: number): void => {
    const rounded = Math.round(left * 200) / 200
    const key = `${guilty} ${rounded}`
    const held = merged.get(key)
    if (held === undefined) merged.set(key, { weight, guilty, left: rounded })
    else held.weight += weight
  }
  const walk = (set: CauseSet, place: number, weight: number, guilty: boolean, left: number): void => {
    if (weight <= 0) return
    const of = set.of[place]
    if (of === undefined) {
      add(weight, guilty, Math.max(0, left))
      return
    }
    const made = Math.min(1, set.expected[place]! / Math.max(1, trips))
    const isPart = partOf(site, isolation, of)
    const goes = bothPoles ? 1 : lineShare(site, isolation, of)
    walk(set, place + 1, weight * isPart * goes, true, left - made)
    walk(set, place + 1, weight * isPart * (1 - goes), true, left)
    walk(set, place + 1, weight * (1 - isPart), guilty, left)
  }
  for (const set of sets) walk(set, 0, set.weight, false, 1)
  return [...merged.values()]
}

/** Chance that a suspect lies behind what is isolated. */
function partOf(site: Site, { of, circuits }: Isolation, suspect: string): number {
  if (of.includes(suspect)) return 1
  const thing = site.things.get(suspect)
  if (thing !== undefined) return circuits.includes(thing.circuit) ? 1 : 0
  if (circuits.length === 0 || suspect === 'device' || suspect === 'supply') return 0
  if (suspect === 'standing') {
    // taking leakage away leaves room, whatever fires: as likely a cure as its share of the level
    return Math.min(
      1,
      circuits.reduce((sum, ref) => sum + (site.standing.get(ref) ?? 0), 0),
    )
  }
  const carrier = site.carriers.get(suspect)
  if (carrier !== undefined) return circuits.includes(carrier) ? CARRIED : 0
  return circuits.length / Math.max(1, site.circuits.length)
}

/** Probability of what has a known place: what is left when the isolation is good for nothing but unplaced suspects is no reason for it. */
export function placedGuilt(site: Site, isolation: Isolation, sets: readonly CauseSet[]): number {
  const isPlaced = (of: string): boolean =>
    site.things.has(of) || site.carriers.has(of) || of === 'standing' || of === 'unlisted'
  let sum = 0
  for (const set of sets) {
    const innocent = set.of.reduce((p, of) => p * (1 - (isPlaced(of) ? partOf(site, isolation, of) : 0)), 1)
    sum += set.weight * (1 - innocent)
  }
  return sum
}

/** Chance that opening the line alone takes the fault away. */
function lineShare({ timeline, things }: Site, { circuits }: Isolation, suspect: string): number {
  if (circuits.length === 0) return 1
  if (suspect === 'load-current') return 0
  const circuit = things.get(suspect)?.circuit
  const isolation = circuit === undefined ? 'single-pole' : things.get(`circuit:${circuit}`)?.isolation
  if (isolation === 'two-pole') return 1
  const conductance = (between: string): number | null => {
    const test = timeline.tests.findLast(
      (t) => t.kind === 'insulation' && t.between === between && t.of === `circuit:${circuit}` && !t.atLeast,
    )
    return test === undefined || test.kind !== 'insulation' || test.megohms <= 0 ? null : 1 / test.megohms
  }
  const [line, neutral] = [conductance('line-earth'), conductance('neutral-earth')]
  return line === null || neutral === null ? LINE_SHARE : line / (line + neutral)
}

/** Whether what is isolated hangs on breakers that open the line only. */
export function leavesNeutral({ things }: Site, { circuits }: Isolation): boolean {
  return circuits.some((ref) => things.get(`circuit:${ref}`)?.isolation !== 'two-pole')
}
