import type { Pattern } from '../../contract/findings.ts'
import { countOf, sentence } from '../words.ts'

/** Fewer trips with a known time cannot show a pattern. */
export const LEAST_TRIPS = 5

/** What is said below five trips with a known time, and what would help: `timed` of `all` have one. */
export function tooFew(timed: number, all: number): Pattern {
  const help =
    timed < all
      ? `${timed} of ${all} trips are timed within half an hour: a logger on the tails would time the others.`
      : `${sentence(countOf(LEAST_TRIPS - timed, 'trip'))} more would do: until then let the logger stay.`
  return { verdict: 'Too few trips with a known time to say.', p: null, help }
}
