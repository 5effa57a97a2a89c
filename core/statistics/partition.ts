import { requireFinite, requireRange } from './checks.ts'

/** A series cut into segments. */
export interface Partition {
  /** Position of the first value of each new segment, ascending; empty when nothing changes. */
  readonly changepoints: Int32Array
  /** Level of each segment, one more than change points (none for an empty series). */
  readonly values: Float64Array
  /** Cost of each segment at its level. */
  readonly segmentCosts: Float64Array
  readonly cost: number
  /** cost + penalty × number of change points: what was minimised. */
  readonly penalisedCost: number
}

/** Preconditions shared by the change point methods. */
export function requireSeries(name: string, y: ArrayLike<number>, penalty: number): void {
  requireFinite(name, y)
  requireRange(name, penalty >= 0 && penalty < Number.POSITIVE_INFINITY, 'a finite penalty from 0', penalty)
}

/** Puts the result together from the segment ends and a function that gives level and cost of [from, to). */
export function partitionOf(
  n: number,
  changepoints: readonly number[],
  penalty: number,
  segment: (from: number, to: number) => { readonly value: number; readonly cost: number },
): Partition {
  const starts = n === 0 ? [] : [0, ...changepoints]
  const parts = starts.map((from, i) => segment(from, starts[i + 1] ?? n))
  const segmentCosts = Float64Array.from(parts, (part) => part.cost)
  const cost = segmentCosts.reduce((a, b) => a + b, 0)
  return {
    changepoints: Int32Array.from(changepoints),
    values: Float64Array.from(parts, (part) => part.value),
    segmentCosts,
    cost,
    penalisedCost: cost + penalty * changepoints.length,
  }
}
