import type { RefObject } from 'preact'
import { useEffect, useRef, useState } from 'preact/hooks'

/** Width of an element in CSS px, followed; 0 before it is laid out. */
export function useWidth<E extends HTMLElement>(): readonly [RefObject<E | null>, number] {
  const ref = useRef<E>(null)
  const [width, setWidth] = useState(0)
  useEffect(() => {
    const element = ref.current
    if (element === null) return
    const observer = new ResizeObserver(() => setWidth(Math.floor(element.clientWidth)))
    observer.observe(element)
    setWidth(Math.floor(element.clientWidth))
    return () => observer.disconnect()
  }, [])
  return [ref, width]
}
