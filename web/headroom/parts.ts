import type { BudgetLine, Headroom } from '../../core/contract/findings.ts'

/** A part of the standing leakage that can be taken out by hand. */
export interface Part {
  readonly of: string
  readonly ma: number
  readonly low: number | null
  readonly high: number | null
  readonly basis: BudgetLine['basis']
  readonly switchings: number
  readonly note: string | null
  /** Whether it counts as on at the median level: it is on more than half of the known time. */
  readonly usuallyOn: boolean
}

export interface Budget {
  /** Largest first. */
  readonly parts: readonly Part[]
  /** Lines without a figure. */
  readonly unjudged: readonly BudgetLine[]
  /** Median standing leakage less the parts that are usually on: what nobody switched, or nobody named. */
  readonly rest: number
  readonly standing: number
  readonly trip: Headroom['tripMa']
}

/** Splits the median standing leakage into parts; `shareOn` says how much of the known time a subject is on (null: not known). */
export function budgetOf(
  headroom: Headroom,
  lines: readonly BudgetLine[],
  shareOn: (of: string) => number | null,
): Budget | null {
  if (headroom.standingMa === null) return null
  const standing = headroom.standingMa.p50
  const parts = lines
    .filter((line): line is BudgetLine & { ma: number } => line.ma !== null && line.ma > 0 && line.basis !== 'unjudged')
    .map((line) => ({
      of: line.of,
      ma: line.ma,
      low: line.low,
      high: line.high,
      basis: line.basis,
      switchings: line.switchings,
      note: line.note ?? null,
      usuallyOn: (shareOn(line.of) ?? (line.of.startsWith('circuit:') ? 1 : 0)) >= 0.5,
    }))
    .sort((a, b) => b.ma - a.ma || (a.of < b.of ? -1 : 1))
  const on = parts.filter((part) => part.usuallyOn).reduce((sum, part) => sum + part.ma, 0)
  return {
    parts,
    unjudged: lines.filter((line) => line.ma === null || line.basis === 'unjudged'),
    rest: Math.max(0, standing - on),
    standing,
    trip: headroom.tripMa,
  }
}

export interface Remaining {
  /** With all parts that are not taken out on together, in phase. */
  readonly ma: number
  /** What any phase between whole and parts leaves possible: |S ± Σa|. */
  readonly least: number
  readonly most: number
  /** Of the trip current. */
  readonly share: number
  readonly headroom: number
}

/**
 * What remains when some parts are taken out of "everything on". Magnitudes of phasors only bound their sum
 * (triangle inequality), so the plain difference comes with the bounds |S − Σa| … S + Σa, sharpened by the largest one.
 */
export function remaining(budget: Budget, out: ReadonlySet<string>): Remaining {
  const whole = budget.rest + budget.parts.reduce((sum, part) => sum + part.ma, 0)
  const taken = budget.parts.filter((part) => out.has(part.of)).map((part) => part.ma)
  const sum = taken.reduce((a, b) => a + b, 0)
  const ma = Math.max(0, whole - sum)
  const largest = Math.max(whole, ...taken)
  return {
    ma,
    least: Math.max(0, 2 * largest - whole - sum),
    most: whole + sum,
    share: ma / budget.trip.value,
    headroom: budget.trip.value - ma,
  }
}
