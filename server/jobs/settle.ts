import type { Store } from '../store/port.ts'

/** Readings moved in one call: a few tens of milliseconds, so that posts wait little. */
const BUDGET = 20_000
const MOST_CALLS = 50

/** Moves readings that came lately to their resting place. Resolves with how many were moved. */
export async function settleReadings(store: Pick<Store, 'settle'>): Promise<number> {
  let moved = 0
  for (let call = 0; call < MOST_CALLS; call++) {
    const some = await store.settle(BUDGET)
    moved += some
    if (some < BUDGET) break
  }
  return moved
}
