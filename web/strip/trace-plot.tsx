import type { JSX } from 'preact'
import { useEffect, useRef } from 'preact/hooks'
import uPlot from 'uplot'
import type { Trace } from '../../core/contract/readings.ts'
import type { SiteClock } from '../format/site-clock.ts'
import { drawBehind, drawFront, type Marks } from './draw-marks.ts'
import type { Palette } from './palette.ts'
import { ticksOf } from './ticks.ts'
import type { View } from './view.ts'

export interface TracePlotProps {
  readonly trace: Trace | null
  readonly view: View
  readonly top: number
  readonly width: number
  readonly height: number
  /** Room left of the plot, px: the current axis, and on wide screens the lanes' names. */
  readonly gutter: number
  readonly right: number
  readonly clock: SiteClock
  readonly palette: Palette
  readonly marks: Marks
}

const EMPTY: uPlot.AlignedData = [[], []]

/** The leakage trace. Zooming is done by the strip; this only draws. */
export function TracePlot(props: TracePlotProps): JSX.Element {
  const holder = useRef<HTMLDivElement>(null)
  const plot = useRef<uPlot | null>(null)
  const now = useRef(props)
  now.current = props
  const { trace, view, top, width, height, gutter, palette, marks } = props

  useEffect(() => {
    if (holder.current === null || width === 0) return
    plot.current = new uPlot(optionsOf(now), dataOf(now.current.trace), holder.current)
    return () => {
      plot.current?.destroy()
      plot.current = null
    }
  }, [gutter, width > 0])
  useEffect(() => {
    if (width > 0) plot.current?.setSize({ width, height })
  }, [width, height])
  useEffect(() => {
    const drawn = plot.current
    if (drawn === null) return
    drawn.batch(() => {
      drawn.setData(dataOf(trace), false)
      drawn.setScale('x', { min: view.from, max: view.to })
      drawn.setScale('y', { min: 0, max: top })
    })
  }, [trace, view.from, view.to, top, gutter, width])
  useEffect(() => plot.current?.redraw(false, true), [palette, marks])
  return <div class="trace-plot" ref={holder} aria-hidden="true" />
}

/** A label half outside the drawing says less than none. */
function fits(plot: uPlot, at: number): boolean {
  const x = plot.valToPos(at, 'x', true) / uPlot.pxRatio
  return x > 36 && x < plot.width - 36
}

function dataOf(trace: Trace | null): uPlot.AlignedData {
  return trace === null ? EMPTY : [trace.t, trace.v]
}

function optionsOf(now: { readonly current: TracePlotProps }): uPlot.Options {
  const { width, height, gutter, right, view, top } = now.current
  const axis = (): Pick<uPlot.Axis, 'font'> => ({ font: `12px ${now.current.palette.font}` })
  const ticks = (plot: uPlot): ReturnType<typeof ticksOf> =>
    ticksOf(now.current.view, now.current.clock, Math.max(2, Math.floor((plot.width - gutter) / 76)))
  let drawn: ReturnType<typeof ticksOf> = []
  return {
    width,
    height,
    ms: 1,
    padding: [6, right, 0, 0],
    legend: { show: false },
    cursor: { show: false },
    scales: {
      x: { time: false, auto: false, min: view.from, max: view.to },
      y: { auto: false, min: 0, max: top },
    },
    axes: [
      {
        ...axis(),
        size: 26,
        gap: 4,
        stroke: () => now.current.palette.soft,
        grid: { stroke: () => now.current.palette.line, width: 1 },
        ticks: { show: false },
        splits: (plot) => {
          drawn = ticks(plot)
          return drawn.map((tick) => tick.at)
        },
        values: (plot) => drawn.map((tick) => (fits(plot, tick.at) ? tick.text : '')),
      },
      {
        ...axis(),
        size: gutter,
        gap: 6,
        stroke: () => now.current.palette.soft,
        grid: { stroke: () => now.current.palette.line, width: 1 },
        ticks: { show: false },
      },
    ],
    series: [{}, { stroke: () => now.current.palette.copper, width: 1.25, spanGaps: false, points: { show: false } }],
    hooks: {
      drawClear: [(plot) => drawBehind(plot, now.current.marks, now.current.palette)],
      draw: [(plot) => drawFront(plot, now.current.marks, now.current.palette)],
    },
  }
}
