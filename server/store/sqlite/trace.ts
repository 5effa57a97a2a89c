import { Columns } from '../../../core/timeline/columns.ts'
import { GAP_INTERVALS, lowerBound, type Series } from '../../../core/timeline/series.ts'
import { traceColumns } from '../../../core/timeline/trace-columns.ts'
import type { TraceColumns } from '../port.ts'
import type { BlockHead, Blocks } from './blocks.ts'
import type { ChannelState } from './channels.ts'
import { clampSpan, keyRange, readSpan } from './reading.ts'
import type { Recent } from './recent.ts'

/** So many blocks are opened to learn the usual interval. */
const SAMPLED_BLOCKS = 16

/** A trace of [from, to): see `traceColumns`. Blocks within one column are read by their summary. */
export function traceSpan(
  blocks: Blocks,
  recent: Recent,
  channel: ChannelState,
  from: number,
  to: number,
  columns: number,
): TraceColumns {
  const span = clampSpan(channel, from, to)
  if (span === undefined) return { t: new Float64Array(0), v: new Float64Array(0), exact: true, stored: 0 }
  const heads = blocks.heads(...keyRange(channel, ...span)).filter((head) => head.tLast >= from && head.tFirst < to)
  const within = heads.reduce((n, head) => n + (head.tFirst >= from && head.tLast < to ? head.n : 0), 0)
  if (within <= 4 * columns) {
    const all = readSpan(blocks, recent, channel, from, to)
    const stored = all.t.length
    return { ...traceColumns(all, from, to, columns), exact: stored <= 4 * columns, stored }
  }
  const gathered = new Columns(from, to, columns)
  let stored = 0
  for (const head of heads) {
    if (head.tFirst >= from && head.tLast < to && gathered.columnOf(head.tFirst) === gathered.columnOf(head.tLast)) {
      gathered.addSummary(head)
      stored += head.n
    } else {
      const readings = blocks.read(head.key)!
      gathered.addReadings(readings)
      stored += lowerBound(readings.t, to) - lowerBound(readings.t, from)
    }
  }
  const waiting = recent.read(channel, ...span)
  gathered.addReadings(waiting)
  stored += waiting.t.length
  return { ...gathered.finish(GAP_INTERVALS * sampledInterval(blocks, heads)), exact: false, stored }
}

/**
 * The usual interval of many blocks: the weighted median of the distances between blocks and of those within some
 * blocks spread evenly over the span, ms.
 */
function sampledInterval(blocks: Blocks, heads: readonly BlockHead[]): number {
  const between = heads.slice(1).map((head, i) => head.tFirst - heads[i]!.tLast)
  const step = Math.max(1, Math.floor(heads.length / SAMPLED_BLOCKS))
  const within: number[] = []
  for (let i = step >> 1; i < heads.length; i += step) pushDistances(within, blocks.read(heads[i]!.key)!)
  const total = heads.reduce((n, head) => n + head.n - 1, 0)
  const weight = within.length === 0 ? 0 : total / within.length
  const all = [
    ...between.map((distance) => ({ distance, weight: 1 })),
    ...within.map((distance) => ({ distance, weight })),
  ].sort((a, b) => a.distance - b.distance)
  let left = all.reduce((sum, one) => sum + one.weight, 0) / 2
  for (const one of all) {
    left -= one.weight
    if (left < 0) return one.distance
  }
  return Number.NaN
}

/** Some 60 distances of neighbouring readings, spread evenly. */
function pushDistances(into: number[], { t }: Series): void {
  const step = Math.max(1, Math.floor(t.length / 60))
  for (let i = 1; i < t.length; i += step) into.push(t[i]! - t[i - 1]!)
}
