import { randomUUID } from 'node:crypto'
import type { Store } from '../store/port.ts'
import { hashOf, makeSecret } from './callers.ts'

/** What happened to the owner key at this start. */
export interface OwnerKey {
  /** A key that was just made and has to be shown, this once. */
  readonly made: string | undefined
  /** What the person who started the server should know. */
  readonly warnings: readonly string[]
}

const SHORT = 16

/** Sees to it that there is an owner key: the given one at the first start, else one of 256 random bits. */
export async function ensureOwnerKey(
  store: Pick<Store, 'hasOwnerKey' | 'addKey' | 'keyByHash'>,
  given: string | undefined,
  now: number,
): Promise<OwnerKey> {
  if (await store.hasOwnerKey()) {
    const known = given === undefined ? undefined : await store.keyByHash(hashOf(given))
    const ignored = given !== undefined && known?.role !== 'owner'
    return {
      made: undefined,
      warnings: ignored ? ['LEAKTIDE_OWNER_KEY differs from the key of the first start, which still holds.'] : [],
    }
  }
  const key = given ?? makeSecret('owner')
  const owner = { id: randomUUID(), site: null, role: 'owner', label: 'owner', hash: hashOf(key) } as const
  await store.addKey(owner, { by: 'first start', at: now })
  const short = given !== undefined && given.length < SHORT
  return {
    made: given === undefined ? key : undefined,
    warnings: short ? [`The owner key is shorter than ${SHORT} characters and may be guessed; use a longer one.`] : [],
  }
}
