import { CoreError } from '../errors.ts'

/** Throws `not_finite` at the first value that is NaN or infinite; `name` is the calling function. */
export function requireFinite(name: string, values: ArrayLike<number>): void {
  for (let i = 0; i < values.length; i++) {
    if (!Number.isFinite(values[i]!)) throw new CoreError('not_finite', `${name} got ${values[i]} at index ${i}`)
  }
}

/** Throws `too_few_values` for less than `least` values. */
export function requireCount(name: string, got: number, least: number): void {
  if (!(got >= least)) throw new CoreError('too_few_values', `${name} needs ${least} values, got ${got}`)
}

/** Throws `unequal_lengths` unless all columns have the length of the first. */
export function requireSameLength(name: string, ...columns: readonly ArrayLike<unknown>[]): void {
  for (const column of columns) {
    if (column.length !== columns[0]!.length) {
      throw new CoreError('unequal_lengths', `${name} got columns of ${columns.map((c) => c.length).join(', ')} values`)
    }
  }
}

/** Throws `out_of_range` when `ok` is false; `need` says what was wanted. NaN fails every comparison, so it ends here too. */
export function requireRange(name: string, ok: boolean, need: string, got: unknown): void {
  if (!ok) throw new CoreError('out_of_range', `${name} needs ${need}, got ${String(got)}`)
}

/** A count of events: a whole number from 0 up. */
export function requireEventCount(name: string, events: number): void {
  requireRange(name, Number.isSafeInteger(events) && events >= 0, 'a whole number of events from 0', events)
}

/** An open probability such as a confidence level: above 0, below 1. */
export function requireConfidence(name: string, confidence: number): void {
  requireRange(name, confidence > 0 && confidence < 1, 'a confidence between 0 and 1', confidence)
}
