import { CoreError } from '../errors.ts'
import { requireFinite } from './checks.ts'

/** A design matrix as rows of equal length; an intercept is a column of ones that the caller puts in. */
export type Design = ArrayLike<ArrayLike<number>>

/** Checks rows, columns and values of a design and returns the number of columns. */
export function requireDesign(name: string, x: Design, y: ArrayLike<number>): number {
  if (x.length !== y.length)
    throw new CoreError('unequal_lengths', `${name} got ${x.length} rows and ${y.length} values`)
  const columns = x[0]?.length ?? 0
  if (columns === 0 || x.length < columns) {
    throw new CoreError('too_few_values', `${name} needs a row for each of its ${columns} columns, got ${x.length}`)
  }
  for (let i = 0; i < x.length; i++) {
    if (x[i]!.length !== columns)
      throw new CoreError('unequal_lengths', `${name}: row ${i} has ${x[i]!.length} columns`)
    requireFinite(name, x[i]!)
  }
  requireFinite(name, y)
  return columns
}

/** Σ x_j b_j of one row. */
export function dot(row: ArrayLike<number>, b: ArrayLike<number>): number {
  let sum = 0
  for (let j = 0; j < b.length; j++) sum += row[j]! * b[j]!
  return sum
}

/** y − X b. */
export function residualsOf(x: Design, y: ArrayLike<number>, b: ArrayLike<number>): Float64Array {
  return Float64Array.from({ length: x.length }, (_, i) => y[i]! - dot(x[i]!, b))
}

/** Each row times its factor, for weighted problems. */
export function scaledRows(x: Design, factors: ArrayLike<number>): Float64Array[] {
  return Array.from({ length: x.length }, (_, i) => Float64Array.from(x[i]!, (v) => v * factors[i]!))
}
