import type { Pattern } from '../../contract/findings.ts'
import { localClock } from '../../timeline/local-clock.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { clockText } from '../windows/clock-windows.ts'
import { rounded } from '../words.ts'
import { CIRCLE_METHOD, type CircleTests, circleTests } from './circle-tests.ts'
import { dayCircle } from './day-circle.ts'
import { figuresOf } from './figures.ts'

const SPOKEN = 0.05

/** How trips lie on the local day, stretched by energised time. */
export function clockTests(timeline: Timeline, trips: readonly number[]): CircleTests {
  const clock = localClock(timeline.sheet.timeZone)
  return circleTests(dayCircle(timeline.energised, clock.minuteOfDay), trips)
}

/**
 * Whether trips gather at a time of day: hours without supply raise no false alarm, a narrow gathering among
 * trips at random is seen as well as a broad one.
 */
export function clockPattern(tests: CircleTests, trips: readonly number[]): Pattern {
  const n = trips.length
  const figures = {
    p: rounded(tests.p),
    method: CIRCLE_METHOD,
    trips: n,
    resultant: rounded(tests.resultant),
    ...figuresOf(tests.figures),
  }
  if (tests.p >= SPOKEN) return { verdict: `No time of day stands out among ${n} trips.`, ...figures }
  const { narrow, middle } = tests
  if (narrow !== null) {
    const [from, until] = [clockText(narrow.fromMinute), clockText(narrow.untilMinute)]
    const span = from === until ? `at ${from}` : `between ${from} and ${until}`
    const width = (narrow.untilMinute - narrow.fromMinute + 1_440) % 1_440
    return {
      verdict: `${narrow.within} of ${n} trips came ${span} local time; ${Number(narrow.expected.toPrecision(2))} would by chance.`,
      ...figures,
      localTime: clockText(narrow.fromMinute + width / 2),
      localFrom: from,
      localUntil: until,
      within: narrow.within,
      expected: rounded(narrow.expected),
    }
  }
  if (middle === null) {
    return { verdict: `${n} trips do not spread evenly over the day, but round no single time.`, ...figures }
  }
  const localTime = clockText(middle)
  return { verdict: `${n} trips gather round ${localTime} local time.`, ...figures, localTime }
}
