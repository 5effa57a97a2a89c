import type { RefObject } from 'preact'
import { useEffect, useRef, useState } from 'preact/hooks'
import { isWhole, moved, spanOf, timeAt, type View, within, zoomed } from './view.ts'

export interface Gestures {
  /** For the element that takes the hand: exactly as wide as the plot. */
  readonly ref: RefObject<HTMLDivElement | null>
  /** What a drag has marked so far, px. */
  readonly marked: { readonly from: number; readonly to: number } | null
}

interface GestureInput {
  readonly view: View
  readonly whole: View
  readonly onView: (view: View) => void
  readonly onCursor: (move: (old: number | null) => number | null) => void
}

/** A drag shorter than this is a click. */
const CLICK = 5
/** A page that scrolls keeps scrolling when the strip comes under the pointer. */
const SCROLLING = 300

/**
 * Hand and keys on the strip. Mouse: drag marks a stretch to zoom to, wheel zooms at the pointer. Touch: one finger
 * moves the view when zoomed, two zoom. Keys: + − and up down zoom, left right move, with Shift the cursor, Home shows all.
 */
export function useGestures(input: GestureInput): Gestures {
  const ref = useRef<HTMLDivElement>(null)
  const now = useRef(input)
  now.current = input
  const [marked, setMarked] = useState<Gestures['marked']>(null)

  useEffect(() => {
    const element = ref.current
    if (element === null) return
    const fingers = new Map<number, number>()
    let start: { readonly view: View; readonly x: number; readonly distance: number } | null = null
    let drag: { readonly from: number; to: number } | null = null
    let scrolledAt = 0
    const width = (): number => element.clientWidth || 1
    const xOf = (event: MouseEvent): number =>
      Math.min(Math.max(0, event.clientX - element.getBoundingClientRect().left), width())
    const time = (x: number): number => timeAt(x, now.current.view, width())
    const setView = (view: View): void => now.current.onView(within(view, now.current.whole))
    const middle = (): { x: number; distance: number } => {
      const xs = [...fingers.values()]
      const least = Math.min(...xs)
      const most = Math.max(...xs)
      return { x: (least + most) / 2, distance: most - least }
    }
    const take = (): void => {
      start = fingers.size === 0 ? null : { view: now.current.view, ...middle() }
    }

    const down = (event: PointerEvent): void => {
      if (event.button !== 0) return
      element.setPointerCapture(event.pointerId)
      if (event.pointerType === 'mouse') {
        drag = { from: xOf(event), to: xOf(event) }
        return
      }
      fingers.set(event.pointerId, xOf(event))
      take()
      now.current.onCursor(() => time(xOf(event)))
    }
    const move = (event: PointerEvent): void => {
      const x = xOf(event)
      if (drag !== null) {
        drag.to = x
        if (Math.abs(drag.to - drag.from) > CLICK) {
          setMarked({ from: Math.min(drag.from, drag.to), to: Math.max(drag.from, drag.to) })
        }
      }
      if (!fingers.has(event.pointerId)) {
        now.current.onCursor(() => time(x))
        return
      }
      fingers.set(event.pointerId, x)
      if (start === null) return
      const { x: at, distance } = middle()
      const shrink = fingers.size > 1 && distance > 10 ? Math.max(10, start.distance) / distance : 1
      if (fingers.size === 1 && isWhole(start.view, now.current.whole)) {
        now.current.onCursor(() => time(x))
        return
      }
      const span = spanOf(start.view) * shrink
      const from = timeAt(start.x, start.view, width()) - (at / width()) * span
      setView({ from, to: from + span })
    }
    const up = (event: PointerEvent): void => {
      if (drag !== null) {
        const { from, to } = drag
        drag = null
        setMarked(null)
        if (event.type === 'pointerup' && Math.abs(to - from) > CLICK) {
          setView({ from: time(Math.min(from, to)), to: time(Math.max(from, to)) })
        }
      }
      fingers.delete(event.pointerId)
      take()
    }
    const leave = (event: PointerEvent): void => {
      if (event.pointerType === 'mouse') now.current.onCursor(() => null)
    }
    const wheel = (event: WheelEvent): void => {
      const { view, whole } = now.current
      const sideways = Math.abs(event.deltaX) > Math.abs(event.deltaY)
      const leaving = event.deltaY > 0 && isWhole(view, whole)
      const scrolling = !event.ctrlKey && event.timeStamp - scrolledAt < SCROLLING
      if (scrolling || leaving || (sideways && isWhole(view, whole))) {
        scrolledAt = event.timeStamp
        return
      }
      event.preventDefault()
      event.stopPropagation()
      if (sideways) now.current.onView(moved(view, whole, event.deltaX / width()))
      else now.current.onView(zoomed(view, whole, Math.exp(Math.sign(event.deltaY) * 0.25), time(xOf(event))))
    }
    const scrolled = (event: WheelEvent): void => {
      if (!element.contains(event.target as Node)) scrolledAt = event.timeStamp
    }
    const key = (event: KeyboardEvent): void => {
      if (event.ctrlKey || event.metaKey || event.altKey) return
      if (press(event, now.current)) event.preventDefault()
    }
    element.addEventListener('pointerdown', down)
    element.addEventListener('pointermove', move)
    element.addEventListener('pointerup', up)
    element.addEventListener('pointercancel', up)
    element.addEventListener('pointerleave', leave)
    element.addEventListener('wheel', wheel, { passive: false })
    element.addEventListener('keydown', key)
    addEventListener('wheel', scrolled, { passive: true })
    return () => {
      element.removeEventListener('pointerdown', down)
      element.removeEventListener('pointermove', move)
      element.removeEventListener('pointerup', up)
      element.removeEventListener('pointercancel', up)
      element.removeEventListener('pointerleave', leave)
      element.removeEventListener('wheel', wheel)
      element.removeEventListener('keydown', key)
      removeEventListener('wheel', scrolled)
    }
  }, [])
  return { ref, marked }
}

/** What a key does; false for a key that means nothing here. */
function press(event: KeyboardEvent, { view, whole, onView, onCursor }: GestureInput): boolean {
  const centre = (view.from + view.to) / 2
  switch (event.key) {
    case '+':
    case '=':
    case 'ArrowUp':
      onView(zoomed(view, whole, 0.6, centre))
      return true
    case '-':
    case '_':
    case 'ArrowDown':
      onView(zoomed(view, whole, 1 / 0.6, centre))
      return true
    case 'ArrowLeft':
    case 'ArrowRight': {
      const side = event.key === 'ArrowLeft' ? -1 : 1
      if (event.shiftKey) {
        onCursor((old) => Math.min(Math.max((old ?? centre) + (side * spanOf(view)) / 100, view.from), view.to))
      } else onView(moved(view, whole, side * 0.2))
      return true
    }
    case 'Home':
      onView(whole)
      return true
    default:
      return false
  }
}
