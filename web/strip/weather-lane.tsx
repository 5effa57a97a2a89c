import type { JSX } from 'preact'
import { useCallback } from 'preact/hooks'
import type { Trace } from '../../core/contract/readings.ts'
import { Canvas } from './canvas.tsx'
import type { Palette } from './palette.ts'
import { usualStep } from './usual-step.ts'
import { type View, xOf } from './view.ts'

interface WeatherLaneProps {
  readonly name: string
  readonly range: string
  readonly kind: 'rain' | 'temperature'
  readonly trace: Trace
  readonly view: View
  readonly width: number
  readonly palette: Palette
}

const HEIGHT = 34

/** Rain as bars of its interval (which ends at the reading), temperature as a thin line. */
export function WeatherLane({ name, range, kind, trace, view, width, palette }: WeatherLaneProps): JSX.Element {
  const draw = useCallback(
    (ctx: CanvasRenderingContext2D, w: number, h: number, ratio: number) => {
      ctx.clearRect(0, 0, w, h)
      ctx.fillStyle = palette.line
      ctx.fillRect(0, h - Math.max(1, Math.round(ratio)), w, Math.max(1, Math.round(ratio)))
      if (kind === 'rain') drawRain(ctx, trace, view, w, h, ratio, palette)
      else drawLine(ctx, trace, view, w, h, ratio, palette)
    },
    [kind, trace, view, palette],
  )
  return (
    <li class="lane lane-weather">
      <span class="lane-name">
        {name} <span class="aside">{range}</span>
      </span>
      <Canvas class="lane-canvas" width={width} height={HEIGHT} draw={draw} />
    </li>
  )
}

type Draw = (
  ctx: CanvasRenderingContext2D,
  trace: Trace,
  view: View,
  w: number,
  h: number,
  ratio: number,
  palette: Palette,
) => void

const drawRain: Draw = (ctx, trace, view, w, h, ratio, palette) => {
  const most = Math.max(1, ...trace.v.map((value) => value ?? 0))
  const step = usualStep(trace)
  ctx.fillStyle = palette.rain
  trace.v.forEach((value, i) => {
    if (value === null || value <= 0) return
    const x = Math.floor(xOf(trace.t[i]! - step, view, w))
    const end = Math.ceil(xOf(trace.t[i]!, view, w))
    const height = Math.max(2 * ratio, (value / most) * (h - 2 * ratio))
    ctx.fillRect(x, h - height, Math.max(ratio, end - x - (end - x > 4 ? ratio : 0)), height)
  })
}

const drawLine: Draw = (ctx, trace, view, w, h, ratio, palette) => {
  const values = trace.v.filter((value) => value !== null)
  const least = Math.min(...values)
  const most = Math.max(...values)
  const y = (value: number): number => h - 3 * ratio - ((value - least) / Math.max(1, most - least)) * (h - 6 * ratio)
  ctx.strokeStyle = palette.soft
  ctx.lineWidth = ratio
  ctx.beginPath()
  let pen = false
  trace.v.forEach((value, i) => {
    if (value === null) {
      pen = false
      return
    }
    const x = xOf(trace.t[i]!, view, w)
    if (pen) ctx.lineTo(x, y(value))
    else {
      // a lone reading has no line to stand on: a short dash shows it
      ctx.moveTo(x - 3 * ratio, y(value))
      ctx.lineTo(x, y(value))
    }
    pen = true
  })
  ctx.stroke()
}
