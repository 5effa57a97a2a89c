import uPlot from 'uplot'
import type { TripMark } from './flags.ts'
import type { Palette } from './palette.ts'
import type { View } from './view.ts'

/** What is drawn round the trace: limits across, nights and gaps behind, trips in front. */
export interface Marks {
  readonly trip: { readonly value: number; readonly low: number; readonly high: number; readonly text: string }
  /** `under`: its label stands below the line, where the trace mostly lies above it. */
  readonly advised: { readonly value: number; readonly text: string; readonly under: boolean }
  readonly nights: readonly View[]
  readonly gaps: readonly View[]
  readonly trips: readonly TripMark[]
}

/** Behind the trace: nights as shading, gaps hatched, the band of the trip current. */
export function drawBehind(plot: uPlot, marks: Marks, palette: Palette): void {
  clipped(plot, (ctx) => {
    const { top, height, left, width } = plot.bbox
    ctx.fillStyle = palette.night
    for (const night of marks.nights) {
      const [x, w] = across(plot, night)
      ctx.fillRect(x, top, w, height)
    }
    ctx.strokeStyle = palette.line
    for (const gap of marks.gaps) hatch(ctx, ...across(plot, gap), top, height, 6 * uPlot.pxRatio)
    const high = plot.valToPos(marks.trip.high, 'y', true)
    const low = plot.valToPos(marks.trip.low, 'y', true)
    ctx.globalAlpha = 0.14
    ctx.fillStyle = palette.trip
    ctx.fillRect(left, high, width, low - high)
    for (const trip of marks.trips) {
      if (trip.to > trip.from) {
        const [x, w] = across(plot, trip)
        ctx.fillRect(x, top, w, height)
      }
    }
  })
}

/** In front: the trip current and 0.3 IΔn as labelled lines, each trip as a line down from its flag. */
export function drawFront(plot: uPlot, marks: Marks, palette: Palette): void {
  clipped(plot, (ctx) => {
    const { top, height } = plot.bbox
    const ratio = uPlot.pxRatio
    limit(plot, ctx, marks.advised, palette.soft, palette, [2, 4])
    limit(plot, ctx, { ...marks.trip, under: false }, palette.trip, palette, [])
    ctx.strokeStyle = palette.trip
    ctx.lineWidth = ratio
    ctx.setLineDash([4 * ratio, 3 * ratio])
    for (const trip of marks.trips) {
      if (trip.from !== trip.to) continue
      const x = Math.round(plot.valToPos(trip.from, 'x', true)) + 0.5
      ctx.beginPath()
      ctx.moveTo(x, top)
      ctx.lineTo(x, top + height)
      ctx.stroke()
    }
  })
}

function limit(
  plot: uPlot,
  ctx: CanvasRenderingContext2D,
  { value, text, under }: Marks['advised'],
  colour: string,
  palette: Palette,
  dash: readonly number[],
): void {
  const ratio = uPlot.pxRatio
  const y = Math.round(plot.valToPos(value, 'y', true)) + 0.5
  ctx.strokeStyle = colour
  ctx.lineWidth = 1.5 * ratio
  ctx.setLineDash(dash.map((length) => length * ratio))
  ctx.beginPath()
  ctx.moveTo(plot.bbox.left, y)
  ctx.lineTo(plot.bbox.left + plot.bbox.width, y)
  ctx.stroke()
  ctx.setLineDash([])
  ctx.font = `${12 * ratio}px ${palette.font}`
  ctx.textBaseline = 'bottom'
  ctx.textAlign = 'right'
  const x = plot.bbox.left + plot.bbox.width - 4 * ratio
  const label = ctx.measureText(text).width + 8 * ratio
  const foot = under ? y + 18 * ratio : y
  ctx.fillStyle = palette.ground
  ctx.fillRect(x + 4 * ratio - label, foot - 17 * ratio, label, 16 * ratio)
  ctx.fillStyle = colour
  ctx.fillText(text, x, foot - 2 * ratio)
}

/** Left edge and width of a stretch of time, device px; at least one px wide. */
function across(plot: uPlot, view: View): [number, number] {
  const x = plot.valToPos(view.from, 'x', true)
  return [x, Math.max(uPlot.pxRatio, plot.valToPos(view.to, 'x', true) - x)]
}

/** Slanting lines over a box: the sign for "not known", also without colour. */
export function hatch(
  ctx: CanvasRenderingContext2D,
  x: number,
  width: number,
  y: number,
  height: number,
  step: number,
): void {
  ctx.save()
  ctx.beginPath()
  ctx.rect(x, y, width, height)
  ctx.clip()
  ctx.beginPath()
  const first = Math.floor((x - height) / step) * step
  for (let at = first; at < x + width; at += step) {
    ctx.moveTo(at, y + height)
    ctx.lineTo(at + height, y)
  }
  ctx.stroke()
  ctx.restore()
}

function clipped(plot: uPlot, draw: (ctx: CanvasRenderingContext2D) => void): void {
  const { left, top, width, height } = plot.bbox
  plot.ctx.save()
  plot.ctx.beginPath()
  plot.ctx.rect(left, top, width, height)
  plot.ctx.clip()
  draw(plot.ctx)
  plot.ctx.restore()
}
