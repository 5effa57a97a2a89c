import { requireConfidence, requireEventCount } from './checks.ts'
import { type ConditionalOdds, conditionalOdds } from './conditional-odds.ts'
import { logChoose } from './log-choose.ts'

/** Counts of a 2 × 2 table [[a, b], [c, d]]; rows say exposed or not, columns event or not. */
export type Table = readonly [readonly [number, number], readonly [number, number]]

/**
 * Fisher's exact test of a 2 × 2 table with all margins fixed, with the conditional odds ratio and its exact central limits.
 * An empty row or column leaves one table only: p is then 1, the odds ratio null, the limits 0 and Infinity.
 *
 * @throws {CoreError} out_of_range
 * @see Fisher (1935), The Design of Experiments; Cornfield (1956), Proc. 3rd Berkeley Symp. 4, 135-148
 */
export function fisherExact(table: Table, options: { readonly confidence?: number } = {}): ConditionalOdds {
  const confidence = options.confidence ?? 0.95
  requireConfidence('fisherExact', confidence)
  for (const count of table.flat()) requireEventCount('fisherExact', count)
  const { least, logWeights } = hypergeometricWeights(table)
  return conditionalOdds(logWeights, table[0][0] - least, confidence)
}

/** Log of the number of ways for each possible upper left count, from `least` up, given the margins. */
export function hypergeometricWeights(table: Table): { readonly least: number; readonly logWeights: Float64Array } {
  const [[a, b], [c, d]] = table
  const least = Math.max(0, a - d)
  const most = Math.min(a + b, a + c)
  const logWeights = Float64Array.from(
    { length: most - least + 1 },
    (_, k) => logChoose(a + b, least + k) + logChoose(c + d, a + c - least - k),
  )
  return { least, logWeights }
}
