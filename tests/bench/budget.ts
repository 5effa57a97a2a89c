// Do the budget's 90 % intervals hold the truth as often as they say? Kinds of simulated sites × seeds.
// BUDGET_SEEDS (4), BUDGET_FIRST (first seed, 1) and BUDGET_KINDS (all; comma-separated) choose what is run.
import { budget } from '../../core/findings/budget.ts'
import { SCENARIOS } from '../../core/simulate/scenarios/scenarios.ts'
import { evidenceOf } from '../../core/simulate/simulated.ts'
import { buildTimeline } from '../../core/timeline/build-timeline.ts'
import { type Measure, median } from './harness.ts'

export const name = 'budget: intervals that should hold the truth nine times of ten'

/** One judged line beside what is true. */
interface Held {
  readonly kind: string
  readonly of: string
  readonly basis: string
  readonly switchings: number
  readonly inside: boolean
  readonly width: number
  /** Figure less truth, mA. */
  readonly off: number
}

/** Simulates, judges, compares; a line for each kind, and figures over all. */
export async function run(): Promise<Measure[]> {
  const seeds = Number(process.env.BUDGET_SEEDS ?? 4)
  const first = Number(process.env.BUDGET_FIRST ?? 1)
  const wanted = process.env.BUDGET_KINDS?.split(',')
  const kinds = Object.keys(SCENARIOS).filter((kind) => wanted === undefined || wanted.includes(kind))
  const all: Held[] = []
  console.log(`${'kind'.padEnd(22)} lines  held  median width  median error, mA`)
  for (const kind of kinds) {
    const here: Held[] = []
    for (let seed = first; seed < first + seeds; seed++) here.push(...heldOf(kind, seed))
    all.push(...here)
    if (here.length > 0) console.log(rowOf(kind, here))
  }
  const groups: readonly (readonly [string, (held: Held) => boolean])[] = [
    ['all lines', () => true],
    ['loads', ({ of }) => of.startsWith('load:')],
    ['circuits', ({ of }) => of.startsWith('circuit:')],
    ['one or two switchings', ({ switchings }) => switchings < 3],
    ['ten switchings or more', ({ switchings }) => switchings >= 10],
  ]
  return groups.flatMap(([what, is]): Measure[] => {
    const lines = all.filter(is)
    if (lines.length === 0) return []
    return [{ what: `truth inside, ${what} (${lines.length})`, value: heldShare(lines), unit: '%', target: '86 to 94' }]
  })
}

function heldOf(kind: string, seed: number): Held[] {
  const simulated = SCENARIOS[kind]!(seed)
  const timeline = buildTimeline(evidenceOf(simulated))
  return budget(timeline).flatMap((line): Held[] => {
    const truth = simulated.truth.budget.get(line.of)
    if (truth === undefined || line.ma === null || line.low === null || line.high === null) return []
    const inside = truth.ma >= line.low && truth.ma <= line.high
    const { of, basis, switchings } = line
    return [{ kind, of, basis, switchings, inside, width: line.high - line.low, off: line.ma - truth.ma }]
  })
}

function rowOf(kind: string, lines: readonly Held[]): string {
  const width = median(lines.map((held) => held.width))
  const off = median(lines.map((held) => held.off))
  return `${kind.padEnd(22)} ${String(lines.length).padStart(5)} ${`${Math.round(heldShare(lines))}%`.padStart(5)} ${width.toFixed(2).padStart(13)} ${off.toFixed(3).padStart(17)}`
}

function heldShare(lines: readonly Held[]): number {
  return (100 * lines.filter(({ inside }) => inside).length) / lines.length
}
