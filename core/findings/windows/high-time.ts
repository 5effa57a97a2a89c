import { quantile } from '../../statistics/quantile.ts'
import type { Series } from '../../timeline/series.ts'
import { NO_SPANS, type Spans } from '../../timeline/spans.ts'
import { heldAbove, thinned } from './held.ts'
import { MINUTE_MS } from './trip-share.ts'

const SHARE = 0.8
const LATE_MS = 5 * MINUTE_MS

/** Time in which the minute levels stood in their upper fifth five minutes ago; empty without a log. */
export function highTime(minutes: Series | null): Spans {
  if (minutes === null || minutes.t.length < 100) return NO_SPANS
  return heldAbove(minutes, quantile(thinned(minutes.v, 20_000), SHARE), true, LATE_MS).inside
}
