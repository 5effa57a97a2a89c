import type { State, StateSpan } from './state-spans.ts'
import { type View, xOf } from './view.ts'

/** A stretch of a lane in device pixels, whole numbers; `mixed` where several states share a pixel column. */
export interface LaneBlock {
  readonly x: number
  readonly width: number
  readonly state: State
}

/**
 * Turns spans into blocks to draw. An on-time shorter than a pixel still gets one: a start must never vanish. Unknown
 * beats off in a shared column, on beats both.
 */
export function laneBlocks(spans: readonly StateSpan[], view: View, width: number): LaneBlock[] {
  const rank: Readonly<Record<State, number>> = { off: 1, unknown: 2, on: 3 }
  const columns = new Uint8Array(Math.max(0, Math.ceil(width)))
  for (const span of spans) {
    if (span.to <= view.from || span.from >= view.to) continue
    const first = Math.max(0, Math.floor(xOf(span.from, view, width)))
    const past = Math.min(columns.length, Math.max(first + 1, Math.ceil(xOf(span.to, view, width))))
    const mark = rank[span.state]
    for (let x = first; x < past; x++) {
      if (columns[x]! < mark) columns[x] = mark
    }
  }
  const states: readonly State[] = ['unknown', 'off', 'unknown', 'on']
  const blocks: LaneBlock[] = []
  for (let x = 0; x < columns.length; ) {
    let end = x + 1
    while (end < columns.length && columns[end] === columns[x]) end++
    blocks.push({ x, width: end - x, state: states[columns[x]!]! })
    x = end
  }
  return blocks
}
