import type { Findings } from '../contract/findings.ts'
import { writeInstant } from '../contract/primitives.ts'
import { buildTimeline } from '../timeline/build-timeline.ts'
import type { Evidence } from '../timeline/evidence.ts'
import { totalMs } from '../timeline/spans.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { answer } from './answer.ts'
import { budget } from './budget.ts'
import { coverage } from './coverage.ts'
import { epochs } from './epochs/epochs.ts'
import { headroom } from './headroom.ts'
import { insulation } from './insulation.ts'
import { nextSteps } from './isolation.ts'
import { withLocalTimes } from './local-text.ts'
import { patterns } from './patterns/patterns.ts'
import { proof } from './proof.ts'
import { runProfiles } from './run-profiles.ts'
import { spreadFindings } from './spreading/spread-findings.ts'
import { type SpokenWindow, suspects, type Weighed } from './suspects.ts'
import { timedStepOf } from './timed/timed-step.ts'
import { tripFindings } from './trips.ts'
import { countOf, sentence } from './words.ts'

/** Raised whenever the same evidence may give other findings than before; part of every cache key. */
export const FINDINGS_VERSION = 5

/**
 * The findings of one device over [from, to): the only door into this folder. Same evidence, same bytes.
 * Too little data is an answer of its own, never an error.
 *
 * @throws {CoreError} unknown_reference when the sheet has no such device
 */
export function findings(evidence: Evidence): Findings {
  const timeline = buildTimeline(evidence)
  const hours = totalMs(timeline.energised) / 3_600_000
  const room = headroom(timeline)
  const lines = budget(timeline)
  const trips = tripFindings(timeline, lines, room)
  const weighed = suspects(timeline, { trips, profiles: runProfiles(timeline, lines), budget: lines, headroom: room })
  const { log } = weighed
  const spreading = spreadFindings(timeline, lines, room)
  return {
    rcd: evidence.rcd,
    from: writeInstant(timeline.from),
    to: writeInstant(timeline.to),
    answer: answer(timeline, hours, room, lines, weighed.suspects),
    coverage: coverage(timeline),
    headroom: room,
    budget: lines,
    trips,
    suspects: weighed.suspects,
    patterns: {
      ...patterns(timeline, { ...log, remainder: log.unexplained?.remainder ?? log.minutes }),
      timedSteps: log.timed.map(timedStepOf),
    },
    next: nextSteps(timeline, hours, {
      suspects: weighed.suspects,
      sets: weighed.sets,
      windows: weighed.windows,
      trips: weighed.frame.trips.length,
      budget: lines,
      standingMa: room.standingMa?.p50 ?? null,
      spread: spreading.plans[0]?.text ?? null,
    }),
    proof: proof(timeline, trips, leadingWindow(weighed)),
    insulation: insulation(timeline, room),
    epochs: epochs(timeline),
    spread: spreading,
    notes: notesOf(timeline, weighed.frame.trips.length),
  }
}

/** When the first suspect of the line-up may act, where that is a set of time. */
function leadingWindow({ suspects: list, windows }: Weighed): SpokenWindow | null {
  return windows.get(list[0]?.of ?? '') ?? null
}

/** What was merged, narrowed or set aside, times on the site's clock. */
function notesOf(timeline: Timeline, counted: number): string[] {
  const notes = timeline.notes.map((note) => withLocalTimes(note, timeline.sheet.timeZone))
  const repeats = timeline.trips.length - counted
  if (repeats > 0) {
    notes.unshift(
      `${sentence(countOf(repeats, 'trip'))} came within a quarter of an hour of closing the device again: ${repeats === 1 ? 'it counts' : 'they count'} as one with the trip before.`,
    )
  }
  return notes
}
