import { type Spans, spansOf } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import type { ExposureWindow } from '../line-up.ts'
import { type Frame, type Layer, layeredWindow, MINUTE_MS } from './trip-share.ts'

/** What stood near the trip current is pushed over it by any last step: so many times likelier soon after one. */
const KICK = 20

/** The minute after every start that is known, of whatever thing. */
export function kicksOf(timeline: Timeline): Spans {
  return spansOf(
    timeline.things.flatMap(({ changes }) =>
      changes.filter((c) => c.on).map(({ at }) => [at, at + MINUTE_MS] as const),
    ),
  )
}

/**
 * A window of layers as it is, and the same with any last step the likelier moment: who takes that step is innocent, and
 * must not be accused beside the one who used the headroom up. The prior is shared by the two. Nothing for what has no contrast.
 */
export function withKicks(
  frame: Frame,
  key: string,
  words: string,
  prior: number,
  layers: readonly Layer[],
  known: Spans,
): ExposureWindow[] {
  const kicked = layers.map(
    (layer): Layer => ({ inside: layer.inside, weight: layer.weight * (KICK - 1), within: frame.kicks }),
  )
  return [
    layeredWindow(frame, key, words, prior / 2, layers, known),
    layeredWindow(
      frame,
      `${key}-kick`,
      `${words}, mostly as something came on`,
      prior / 2,
      [...layers, ...kicked],
      known,
    ),
  ].filter((w): w is ExposureWindow => w !== null)
}
