import type { Spans } from './spans.ts'

/**
 * A step function with three values over time: where it holds, where it does not, and (all the rest) where nobody
 * knows. `on` and `off` are disjoint; unknown is never off.
 */
export interface Exposure {
  readonly on: Spans
  readonly off: Spans
}
