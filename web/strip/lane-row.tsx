import type { JSX } from 'preact'
import { useCallback } from 'preact/hooks'
import { percent } from '../format/numbers.ts'
import { words } from '../words.ts'
import { Canvas } from './canvas.tsx'
import { hatch } from './draw-marks.ts'
import { laneBlocks } from './lane-blocks.ts'
import type { Lane } from './lanes.ts'
import type { Palette } from './palette.ts'
import { tally } from './state-spans.ts'
import type { View } from './view.ts'

interface LaneRowProps {
  readonly lane: Lane
  readonly view: View
  readonly width: number
  readonly palette: Palette
}

const HEIGHT = 12

/** One circuit or load on the time axis: on is filled, off a thin line, not known hatched. */
export function LaneRow({ lane, view, width, palette }: LaneRowProps): JSX.Element {
  const draw = useCallback(
    (ctx: CanvasRenderingContext2D, w: number, h: number, ratio: number) => {
      ctx.clearRect(0, 0, w, h)
      for (const { x, width: span, state } of laneBlocks(lane.spans, view, w)) {
        if (state === 'on') {
          ctx.fillStyle = palette.ink
          ctx.globalAlpha = lane.kind === 'circuit' ? 0.55 : 0.9
          ctx.fillRect(x, Math.round(h * 0.1), span, Math.round(h * 0.8))
          ctx.globalAlpha = 1
        } else if (state === 'off') {
          ctx.fillStyle = palette.soft
          ctx.fillRect(x, Math.round(h / 2), span, Math.max(1, Math.round(ratio)))
        } else {
          ctx.strokeStyle = palette.soft
          ctx.lineWidth = ratio * 0.75
          hatch(ctx, x, span, Math.round(h * 0.1), Math.round(h * 0.8), 5 * ratio)
        }
      }
    },
    [lane, view, palette],
  )
  return (
    <li class={`lane lane-${lane.kind}`}>
      <span class="lane-name" title={lane.label}>
        {lane.label}
      </span>
      <Canvas class="lane-canvas" width={width} height={HEIGHT} draw={draw} />
      <span class="unseen">: {summaryOf(lane)}</span>
    </li>
  )
}

function summaryOf(lane: Lane): string {
  if (lane.source === 'assumed') return words.strip.neverOff
  const sum = tally(lane.spans)
  const known = sum.on + sum.off
  return words.strip.laneSummary(known === 0 ? null : percent(sum.on / known), sum.starts)
}
