import type { Whoami } from '../../core/contract/keys.ts'
import { CallError, call } from './call.ts'

/** Who is signed in; null for nobody. */
export async function whoAmI(signal?: AbortSignal): Promise<Whoami | null> {
  try {
    return await call<Whoami>('/session', { signal })
  } catch (error) {
    if (error instanceof CallError && error.status === 401) return null
    throw error
  }
}

/** Signs the page in; the key goes to the server once and is kept nowhere here. */
export async function signIn(key: string): Promise<Whoami> {
  return call<Whoami>('/session', { method: 'POST', body: { key } })
}

export async function signOut(): Promise<void> {
  await call<void>('/session', { method: 'DELETE' })
}

/** Takes a key out of `#key=…` and out of the address at once, so that it stays in no history. */
export function takeKeyFromAddress(): string | null {
  const key = new URLSearchParams(location.hash.slice(1)).get('key')
  if (key === null) return null
  history.replaceState(null, '', location.pathname + location.search)
  return key.trim() || null
}
