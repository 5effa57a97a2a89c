import { EMPTY_SERIES, type Series, sliceSeries } from '../../../core/timeline/series.ts'
import { type Blocks, blockKey, HOUR_MS, hourOf } from './blocks.ts'
import type { ChannelState } from './channels.ts'
import { union } from './merge.ts'
import type { Recent } from './recent.ts'

/** The most readings of one piece. */
const PIECE = 65_536

/** Keys of the first and last block that can hold readings of [from, to), which lies within the channel's extent. */
export function keyRange(channel: ChannelState, from: number, to: number): readonly [low: number, high: number] {
  return [blockKey(channel.num, hourOf(from)), blockKey(channel.num, Math.ceil(to / HOUR_MS) - 1)]
}

/** The part of [from, to) in which the channel can have readings; undefined when there is none. */
export function clampSpan(
  channel: ChannelState,
  from: number,
  to: number,
): readonly [from: number, to: number] | undefined {
  const low = Math.max(from, channel.first)
  const high = Math.min(to, channel.last + 1)
  return channel.count > 0 && low < high ? [low, high] : undefined
}

/** Readings of a channel in [from, to): blocks and recent rows as one series. */
export function readSpan(blocks: Blocks, recent: Recent, channel: ChannelState, from: number, to: number): Series {
  const span = clampSpan(channel, from, to)
  if (span === undefined) return EMPTY_SERIES
  const rested = sliceSeries(blocks.readRange(...keyRange(channel, ...span)), ...span)
  return union(rested, recent.read(channel, ...span))
}

/** Cuts [from, to) at hours so that each part holds about `PIECE` readings of blocks, or one hour. */
export function cutSpan(blocks: Blocks, channel: ChannelState, from: number, to: number): number[] {
  const span = clampSpan(channel, from, to)
  if (span === undefined) return []
  const cuts = [span[0]]
  let held = 0
  for (const head of blocks.heads(...keyRange(channel, ...span))) {
    const start = hourOf(head.tFirst) * HOUR_MS
    if (held > 0 && held + head.n > PIECE && start > cuts.at(-1)!) {
      cuts.push(start)
      held = 0
    }
    held += head.n
  }
  cuts.push(span[1])
  return cuts
}

/** A series in parts of at most `PIECE` readings, as views. */
export function* slices(series: Series): Generator<Series> {
  for (let i = 0; i < series.t.length; i += PIECE) {
    yield { t: series.t.subarray(i, i + PIECE), v: series.v.subarray(i, i + PIECE) }
  }
}
