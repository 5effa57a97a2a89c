import { useEffect, useRef, useState } from 'preact/hooks'
import type { Trace } from '../../core/contract/readings.ts'
import { call, isAbort } from '../api/call.ts'
import { apiPath } from '../api/paths.ts'
import type { View } from './view.ts'

export interface Traces {
  readonly traces: ReadonlyMap<string, Trace>
  /** What the traces cover; null before the first came. */
  readonly view: View | null
  readonly error: unknown
  readonly busy: boolean
}

interface Request {
  readonly site: string
  readonly channels: readonly string[]
  readonly view: View
  /** Device pixels of the plot: the server answers with exactly what they can show. Nothing is asked with 0. */
  readonly columns: number
  readonly version: number
}

/** A hand that still zooms asks for nothing; this long after its last move the exact pixels are fetched. */
const REST = 120

/** Traces of some channels for the pixels of a view. The last ones stay until the new ones are there; late answers are dropped. */
export function useTraces({ site, channels, view, columns, version }: Request): Traces {
  const [state, setState] = useState<Traces>({ traces: new Map(), view: null, error: null, busy: true })
  const first = useRef(true)
  const list = channels.join('\n')
  useEffect(() => {
    if (columns === 0) return
    const aborter = new AbortController()
    const refs = list === '' ? [] : list.split('\n')
    const query = { from: new Date(view.from).toISOString(), to: new Date(view.to).toISOString(), columns }
    const fetchAll = async (): Promise<void> => {
      setState((old) => ({ ...old, busy: true }))
      try {
        const found = await Promise.all(
          refs.map(async (ref) => {
            const path = apiPath(['sites', site, 'channels', ref, 'trace'], query)
            return [ref, await call<Trace>(path, { signal: aborter.signal })] as const
          }),
        )
        setState({ traces: new Map(found), view: { from: view.from, to: view.to }, error: null, busy: false })
      } catch (error) {
        if (!isAbort(error)) setState((old) => ({ ...old, error, busy: false }))
      }
    }
    const timer = setTimeout(fetchAll, first.current ? 0 : REST)
    first.current = false
    return () => {
      clearTimeout(timer)
      aborter.abort()
    }
  }, [site, list, view.from, view.to, columns, version])
  return state
}
