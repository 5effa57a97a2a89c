import { createHash, randomBytes } from 'node:crypto'
import type { KeyRole } from '../../core/contract/index.ts'
import type { KeyRecord } from '../store/port.ts'

/** Who calls: the key behind the call, and how it was shown. */
export interface Caller {
  readonly key: KeyRecord
  readonly via: 'bearer' | 'page'
  /** Hash of the page's session token; null for a bearer. */
  readonly session: Uint8Array | null
}

/** A new secret of 256 random bits, told apart by its prefix. */
export function makeSecret(prefix: KeyRole | 'page'): string {
  return `lt-${prefix}-${randomBytes(32).toString('base64url')}`
}

/**
 * What is kept of a secret. Looking a key up by its hash leaks nothing by timing: whoever asks cannot choose the hash,
 * only what it is made of.
 */
export function hashOf(secret: string): Uint8Array {
  return createHash('sha256').update(secret, 'utf8').digest()
}
