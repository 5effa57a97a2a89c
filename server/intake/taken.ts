import { MAX_REFUSED_LISTED, type RefusedReading } from '../../core/contract/index.ts'
import type { ReadingBatch } from '../store/port.ts'

/** What every way in makes of a body: readings in batches, and those that could not be taken, one by one. */
export interface Taken {
  readonly batches: readonly ReadingBatch[]
  /** How many readings the body carried. */
  readonly given: number
  readonly refusals: Refusals
  /** Where the sender says so: within how many ms the next reading of a channel comes. */
  readonly expected?: ReadonlyMap<string, number>
}

/** Counts refused readings and lists the first of them. */
export class Refusals {
  readonly listed: RefusedReading[] = []
  /** The column each listed one stands in, for its place in the body. */
  readonly columns: string[] = []
  count = 0

  add(block: number, index: number, column: string, why: string): void {
    this.count++
    if (this.listed.length >= MAX_REFUSED_LISTED) return
    this.listed.push({ block, index, why })
    this.columns.push(column)
  }
}
