import type { Pattern } from '../../contract/findings.ts'
import { seededRandom } from '../../statistics/random.ts'
import { localClock } from '../../timeline/local-clock.ts'
import { lowerBound } from '../../timeline/series.ts'
import { type Spans, spansOf } from '../../timeline/spans.ts'
import { nightSpans } from '../../timeline/sun.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { onCircle, wayRound } from '../timed/gathering.ts'
import { sunEvents } from '../timed/run-clock.ts'
import { figure, rounded } from '../words.ts'
import { CIRCLE_METHOD, type CircleTests, circleTests } from './circle-tests.ts'
import { dayCircle } from './day-circle.ts'
import { figuresOf } from './figures.ts'
import { gathered } from './gathered.ts'
import { ratePattern } from './rate-pattern.ts'

const MINUTE_MS = 60_000
const HALF_DAY_MS = 12 * 60 * MINUTE_MS
const SPOKEN = 0.05
/** Resamples, and those of many trips. */
const DRAWS = 200
const FEW_DRAWS = 50
const MANY = 60
/** Minutes from sunset or sunrise beyond which nothing is put down to them. */
const FARTHEST = 180
/** Clock and sun are told apart when the likelihoods differ by this factor and so large a share of resamples agrees. */
const APART = Math.log(20)
const AGREED = 0.9

interface Around {
  readonly event: 'sunset' | 'sunrise'
  readonly times: Float64Array
  readonly tests: CircleTests
}

/**
 * Whether trips keep to the sun: time from sunset and from sunrise tested as the time of day is, dark and dusk hours by exact
 * rates, all paid for (Bonferroni). What keeps to the sun is compared with the clock by the likelihood of either gathering (`gathered`), with
 * resampled trips (Efron 1979) to say how sure that is; a span in which the event hardly moved cannot tell them apart, and says so.
 */
export function sunPattern(timeline: Timeline, trips: readonly number[], byClock: CircleTests): Pattern {
  const { latitude, longitude } = timeline.sheet
  if (latitude === undefined || longitude === undefined) {
    return { verdict: 'The sheet has no latitude and longitude.', p: null }
  }
  const events = sunEvents(timeline, latitude, longitude)
  const around: Around[] = []
  for (const event of ['sunset', 'sunrise'] as const) {
    const times = events[event]
    if (times.length === 0) continue
    const circle = dayCircle(timeline.energised, (ms) => onCircle((ms - nearest(times, ms)) / MINUTE_MS))
    around.push({ event, times, tests: circleTests(circle, trips) })
  }
  const rates = ratesRoundSun(timeline, trips, events, nightSpans(timeline.from, timeline.to, latitude, longitude))
  const closest = around.reduce<Around | null>((a, b) => (a === null || closer(b, a) ? b : a), null)
  if (closest === null) return rates
  const tried = around.length + 1
  const p = Math.min(1, tried * Math.min(closest.tests.p, rates.p ?? 1))
  const told = comparison(timeline, trips, closest, byClock)
  if (closest.tests.p * tried >= SPOKEN || (isFar(closest) && told.figures.closer !== 'sun')) {
    // what lies hours from sunset and sunrise is the clock's
    const own = Math.min(1, tried * (rates.p ?? 1))
    return { ...rates, p: rounded(own), ...(own >= SPOKEN ? { verdict: unclear(rates.verdict) } : {}) }
  }
  return {
    verdict: `${whenOf(closest, trips.length)} ${told.words}`,
    p: rounded(p),
    method: `${CIRCLE_METHOD}, for sunset and sunrise; compared with the clock by the likelihood of one gathering among events at random and by resamples (Efron 1979)`,
    trips: trips.length,
    event: closest.event,
    ...offsetsOf(closest),
    resultant: rounded(closest.tests.resultant),
    ...figuresOf(closest.tests.figures),
    ...told.figures,
  }
}

function closer(a: Around, b: Around): boolean {
  return a.tests.p === b.tests.p ? a.tests.resultant > b.tests.resultant : a.tests.p < b.tests.p
}

function nearest(times: Float64Array, ms: number): number {
  return times[Math.min(times.length - 1, lowerBound(times, ms - HALF_DAY_MS))]!
}

/** Whether the gathering lies hours from the event. */
function isFar(around: Around): boolean {
  const { fromMinutes, offsetMinutes } = offsetsOf(around)
  return Math.abs(fromMinutes ?? offsetMinutes ?? 0) > FARTHEST
}

/** A preference that was one among few and is none among all. */
function unclear(verdict: string): string {
  return verdict.replace(/^(More|Fewer) trips than chance:/, 'No clear preference:')
}

function ratesRoundSun(
  { from, to, energised }: Timeline,
  trips: readonly number[],
  events: { readonly sunset: Float64Array; readonly sunrise: Float64Array },
  night: Spans,
): Pattern {
  const known = spansOf([[from, to]])
  const round = (times: Float64Array): Spans =>
    spansOf(Array.from(times, (at) => [at - 15 * MINUTE_MS, at + 45 * MINUTE_MS] as const))
  const sets = [
    { words: 'in the dark', inside: night, known },
    { words: 'within the hour round sunset', inside: round(events.sunset), known },
    { words: 'within the hour round sunrise', inside: round(events.sunrise), known },
  ]
  return ratePattern(energised, trips, sets, 'No dark or light hours to compare.')
}

interface Offsets {
  readonly fromMinutes?: number
  readonly untilMinutes?: number
  readonly within?: number
  readonly expected?: number
  readonly offsetMinutes?: number
}

function offsetsOf({ tests: { narrow, middle } }: Around): Offsets {
  if (narrow !== null) {
    const from = wayRound(narrow.fromMinute, 0)
    const until = from + onCircle(narrow.untilMinute - narrow.fromMinute)
    return {
      fromMinutes: Math.round(from),
      untilMinutes: Math.round(until),
      within: narrow.within,
      expected: rounded(narrow.expected),
    }
  }
  return middle === null ? {} : { offsetMinutes: Math.round(wayRound(middle, 0)) }
}

function whenOf(around: Around, n: number): string {
  const { event } = around
  const { narrow, middle } = around.tests
  const offsets = offsetsOf(around)
  if (narrow !== null) {
    const span = spanOf(offsets.fromMinutes!, offsets.untilMinutes!, event)
    return `${narrow.within} of ${n} trips came ${span}; ${Number(narrow.expected.toPrecision(2))} would by chance.`
  }
  if (middle !== null) return `${n} trips gather round ${sideOf(offsets.offsetMinutes!, event)}.`
  return `${n} trips do not spread evenly round ${event}, but gather at no single time from it.`
}

function spanOf(from: number, until: number, event: string): string {
  if (from === until) return sideOf(from, event)
  if (from >= 0) return `${from} to ${until} minutes after ${event}`
  if (until <= 0) return `${-from} to ${-until} minutes before ${event}`
  return `from ${sideOf(from, event)} to ${sideOf(until, event)}`
}

function sideOf(minutes: number, event: string): string {
  if (minutes === 0) return event
  const size = Math.abs(minutes) < 100 ? `${Math.abs(minutes)} minutes` : `${figure(Math.abs(minutes) / 60)} hours`
  return `${size} ${minutes < 0 ? 'before' : 'after'} ${event}`
}

function comparison(
  timeline: Timeline,
  trips: readonly number[],
  { event, times, tests }: Around,
  byClock: CircleTests,
): { readonly words: string; readonly figures: Record<string, number | string> } {
  const clock = localClock(timeline.sheet.timeZone)
  const minutes = trips.map((t) => clock.minuteOfDay(nearest(times, t)))
  const away = minutes.map((m) => wayRound(m, minutes[0]!))
  const moved = Math.max(...away) - Math.min(...away)
  const days = Math.max(1, Math.round((Math.max(...trips) - Math.min(...trips)) / 86_400_000))
  const n = trips.length
  const favour = gathered(tests.places).gain - gathered(byClock.places).gain
  const random = seededRandom(`sun or clock ${tests.places.map((x) => x.toFixed(5)).join(' ')}`)
  const draws = n > MANY ? FEW_DRAWS : DRAWS
  let forSun = 0
  for (let draw = 0; draw < draws; draw++) {
    const drawn = Array.from({ length: n }, () => random.integer(n))
    const gainOf = (places: readonly number[]): number => gathered(drawn.map((i) => places[i]!)).gain
    if (gainOf(tests.places) > gainOf(byClock.places)) forSun++
  }
  const agreed = forSun / draws
  const figures = {
    movedMinutes: Math.round(moved),
    likelihoodOverClock: rounded(Math.exp(Math.min(50, favour))),
    resamplesForSun: rounded(agreed),
  }
  if (favour > APART && agreed >= AGREED) {
    return {
      words: `This holds better than any clock time, while ${event} moved by ${Math.round(moved)} minutes.`,
      figures: { ...figures, closer: 'sun' },
    }
  }
  if (favour < -APART && agreed <= 1 - AGREED) {
    return { words: 'But the clock time holds better than the sun.', figures: { ...figures, closer: 'clock' } }
  }
  const length = days === 1 ? 'one day' : `${days} days`
  return {
    words: `Over ${length} ${event} moved by ${Math.round(moved)} minutes: clock and sun cannot be told apart yet.`,
    figures: { ...figures, closer: 'unknown' },
  }
}
