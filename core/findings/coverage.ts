import type { Coverage } from '../contract/findings.ts'
import { writeInstant } from '../contract/primitives.ts'
import { totalMs } from '../timeline/spans.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { rounded } from './words.ts'

const HOUR_MS = 3_600_000

/** How much the findings rest on: energised hours, those with leakage readings, trips, and every channel's gaps. */
export function coverage(timeline: Timeline): Coverage {
  return {
    energisedHours: rounded(totalMs(timeline.energised) / HOUR_MS),
    readingHours: rounded(totalMs(timeline.logged) / HOUR_MS),
    trips: timeline.trips.length,
    gaps: timeline.gaps.map((gap) => ({
      channel: gap.channel,
      from: writeInstant(gap.from),
      to: writeInstant(gap.to),
    })),
  }
}
