import { useCallback, useEffect, useRef, useState } from 'preact/hooks'
import { isWhole, sameView, type View, within } from './view.ts'

/** The visible stretch. One that reached the end follows the end as the whole grows; `focus` moves it. */
export function useView(whole: View, focus: View | null): readonly [View, (view: View) => void] {
  const [view, setView] = useState<View>(whole)
  const known = useRef(whole)
  const set = useCallback(
    (next: View) =>
      setView((old) => {
        const rounded = { from: Math.round(next.from), to: Math.round(next.to) }
        return sameView(old, rounded) ? old : rounded
      }),
    [],
  )
  useEffect(() => {
    const old = known.current
    known.current = { from: whole.from, to: whole.to }
    if (sameView(old, known.current)) return
    setView((seen) => {
      if (isWhole(seen, old)) return known.current
      const on = seen.to >= old.to ? whole.to - old.to : 0
      return within({ from: seen.from + on, to: seen.to + on }, known.current)
    })
  }, [whole.from, whole.to])
  useEffect(() => {
    if (focus !== null) set(within(focus, known.current))
  }, [focus, set])
  return [view, set]
}
