// The stages of `findings` one by one, in its order, so that a hot spot shows.
import { budget } from '../../core/findings/budget.ts'
import { coverage } from '../../core/findings/coverage.ts'
import { epochs } from '../../core/findings/epochs/epochs.ts'
import { headroom } from '../../core/findings/headroom.ts'
import { nextSteps } from '../../core/findings/isolation.ts'
import { patterns } from '../../core/findings/patterns/patterns.ts'
import { proof } from '../../core/findings/proof.ts'
import { runProfiles } from '../../core/findings/run-profiles.ts'
import { spreadFindings } from '../../core/findings/spreading/spread-findings.ts'
import { suspects } from '../../core/findings/suspects.ts'
import { tripFindings } from '../../core/findings/trips.ts'
import { buildTimeline } from '../../core/timeline/build-timeline.ts'
import type { Evidence } from '../../core/timeline/evidence.ts'
import { totalMs } from '../../core/timeline/spans.ts'

/** Milliseconds by stage. */
export type Stages = Readonly<Record<string, number>>

/** Runs every stage once. */
export function stagesOf(evidence: Evidence): Stages {
  const spent: Record<string, number> = {}
  const timed = <T>(stage: string, work: () => T): T => {
    const began = performance.now()
    const result = work()
    spent[stage] = performance.now() - began
    return result
  }
  const timeline = timed('timeline', () => buildTimeline(evidence))
  const room = timed('headroom', () => headroom(timeline))
  const lines = timed('budget', () => budget(timeline))
  const trips = timed('trips', () => tripFindings(timeline, lines, room))
  const profiles = timed('run profiles', () => runProfiles(timeline, lines))
  const weighed = timed('suspects', () => suspects(timeline, { trips, profiles, budget: lines, headroom: room }))
  const { log } = weighed
  timed('patterns', () => patterns(timeline, { ...log, remainder: log.unexplained?.remainder ?? log.minutes }))
  timed('next', () =>
    nextSteps(timeline, totalMs(timeline.energised) / 3_600_000, {
      suspects: weighed.suspects,
      sets: weighed.sets,
      windows: weighed.windows,
      trips: weighed.frame.trips.length,
      budget: lines,
      standingMa: room.standingMa?.p50 ?? null,
    }),
  )
  timed('proof', () => proof(timeline, trips))
  timed('epochs', () => epochs(timeline))
  timed('spread', () => spreadFindings(timeline, lines, room))
  timed('coverage', () => coverage(timeline))
  return spent
}
