import type { JSX } from 'preact'
import { useLayoutEffect, useRef } from 'preact/hooks'

interface CanvasProps {
  /** CSS px. */
  readonly width: number
  readonly height: number
  readonly class?: string
  /** Draws in device px; keep it stable, a new one draws anew. */
  readonly draw: (ctx: CanvasRenderingContext2D, width: number, height: number, ratio: number) => void
}

/** A canvas with one device pixel per device pixel. */
export function Canvas(props: CanvasProps): JSX.Element {
  const ref = useRef<HTMLCanvasElement>(null)
  const { width, height, draw } = props
  useLayoutEffect(() => {
    const canvas = ref.current
    const ctx = canvas?.getContext('2d')
    if (!canvas || !ctx) return
    const ratio = devicePixelRatio || 1
    canvas.width = Math.round(width * ratio)
    canvas.height = Math.round(height * ratio)
    canvas.style.width = `${width}px`
    canvas.style.height = `${height}px`
    draw(ctx, canvas.width, canvas.height, ratio)
  }, [width, height, draw])
  return <canvas ref={ref} class={props.class} />
}
