import type { Headroom } from '../contract/findings.ts'
import type { Timeline } from '../timeline/timeline.ts'

/** Slow drift of the level; null until the statistics for it are there. */
export function levelDrift(_timeline: Timeline): NonNullable<Headroom['drift']> | null {
  return null
}
