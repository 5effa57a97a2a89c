import type { Findings } from '../contract/findings.ts'
import { writeInstant } from '../contract/primitives.ts'
import type { Evidence } from '../timeline/evidence.ts'

/** Raised whenever the same evidence may give other findings than before; part of every cache key. */
export const FINDINGS_VERSION = 1

/**
 * The findings of one device over [from, to): the only door into this folder. Same evidence, same bytes.
 * Too little data is an answer of its own, never an error.
 */
export function findings(evidence: Evidence): Findings {
  const rcd = evidence.sheet.rcds.find((r) => r.ref === evidence.rcd)
  const rated = rcd?.ratedMa ?? 30
  return {
    rcd: evidence.rcd,
    from: writeInstant(evidence.from),
    to: writeInstant(evidence.to),
    answer: { text: 'Not enough to say yet.', sureness: null },
    coverage: { energisedHours: (evidence.to - evidence.from) / 3_600_000, readingHours: 0, trips: 0, gaps: [] },
    headroom: {
      tripMa: { value: 0.75 * rated, low: 0.5 * rated, high: rated, basis: 'limits' },
      standingMa: null,
      shareOfRating: null,
      advisedShare: 0.3,
    },
    budget: [],
    trips: [],
    suspects: [],
    patterns: {
      clock: { verdict: 'too few trips to say' },
      period: { verdict: 'too few trips to say' },
      sun: { verdict: 'too few trips to say' },
      rain: { verdict: 'no rain channel' },
      temperature: { verdict: 'no temperature channel' },
      load: { verdict: 'no load current channel' },
      timedSteps: [],
    },
    next: [],
    proof: { remedyAt: null, quietHours: null, confidenceFixed: null, hoursTo95: null, text: 'No remedy is recorded.' },
    notes: [],
  }
}
