import { useEffect, useRef, useState } from 'preact/hooks'
import { isAbort } from './call.ts'

/** What a part of the page knows: the last good value stays while a new one is fetched or the network is away. */
export interface Fetched<T> {
  readonly value: T | null
  readonly error: unknown
  readonly busy: boolean
}

/**
 * Fetches when `key` changes (a null key waits) and once more for every `version`. Keeps the old value while a new
 * version of the same key comes; drops it when the key changes, unless `keep` is set.
 */
export function useFetched<T>(
  key: string | null,
  version: number,
  fetcher: (signal: AbortSignal) => Promise<T>,
  keep = false,
): Fetched<T> {
  const [state, setState] = useState<Fetched<T> & { key: string | null }>({ key, value: null, error: null, busy: true })
  const latest = useRef(fetcher)
  latest.current = fetcher
  useEffect(() => {
    if (key === null) return
    const aborter = new AbortController()
    setState((old) => ({ key, value: old.key === key || keep ? old.value : null, error: null, busy: true }))
    latest.current(aborter.signal).then(
      (value) => setState({ key, value, error: null, busy: false }),
      (error: unknown) => {
        if (!isAbort(error)) setState((old) => ({ ...old, key, error, busy: false }))
      },
    )
    return () => aborter.abort()
  }, [key, version, keep])
  return state.key === key || keep ? state : { value: null, error: null, busy: true }
}
