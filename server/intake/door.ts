import type { ProblemIssue, ReadingsAnswer } from '../../core/contract/index.ts'
import type { Store } from '../store/port.ts'
import { Refused } from './refused.ts'
import type { Taken } from './taken.ts'

/** How a refused reading's place is written as a JSON pointer: it depends on the shape of the body. */
export type Place = (block: number, index: number, column: string) => string

/**
 * The one door for readings, whichever way they came. Resolves when they are durable.
 * @throws {Refused} when the body carried readings and not one could be taken; nothing is stored then
 * @throws {StoreError} from the store
 */
export async function takeIn(
  store: Pick<Store, 'append'>,
  site: string,
  taken: Taken,
  place: Place,
  options: { readonly replace: boolean },
): Promise<ReadingsAnswer> {
  const { batches, given, refusals } = taken
  if (given > 0 && refusals.count === given) {
    const issues = refusals.listed.map(
      ({ block, index, why }, i): ProblemIssue => ({ path: place(block, index, refusals.columns[i]!), why }),
    )
    throw new Refused('Not one reading of this body could be taken.', issues, { readings: refusals.listed })
  }
  const report =
    batches.length > 0 ? await store.append(site, batches, options) : { stored: 0, repeated: 0, conflicting: 0 }
  return { ...report, refused: refusals.listed, refusedCount: refusals.count }
}
