import { createHash } from 'node:crypto'

/** JSON with the keys of every object in order, so that equal content is equal text; undefined fields are left out. */
export function canonicalJson(value: unknown): string {
  return JSON.stringify(value, (_key, inner: unknown) =>
    inner !== null && typeof inner === 'object' && !Array.isArray(inner)
      ? Object.fromEntries(Object.entries(inner).sort(([a], [b]) => (a < b ? -1 : 1)))
      : inner,
  )
}

/** SHA-256 of the canonical JSON: the natural key of a record. */
export function contentHash(value: unknown): Buffer {
  return createHash('sha256').update(canonicalJson(value)).digest()
}
