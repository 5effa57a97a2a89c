import { kuiper, meanDirection, rayleigh } from '../../statistics/index.ts'
import { circleScan } from './circle-scan.ts'
import type { DayCircle } from './day-circle.ts'

/** Three tests for an even spread on a circle stretched by energised time, and where the events gather. */
export interface CircleTests {
  /** The smallest of the three, times three (Bonferroni). */
  readonly p: number
  readonly resultant: number
  /** Places on the stretched circle. */
  readonly places: readonly number[]
  /** The narrow gathering, when it stands out; minutes of the circle. */
  readonly narrow: {
    readonly fromMinute: number
    readonly untilMinute: number
    readonly within: number
    readonly expected: number
  } | null
  /** Middle of one broad gathering, minutes; null when they do not gather round one place. */
  readonly middle: number | null
  readonly figures: Readonly<Record<string, number>>
}

export const CIRCLE_METHOD =
  "Rayleigh's and Kuiper's tests (Mardia & Jupp 2000) and a scan for narrow gatherings (Naus 1965), on times stretched by energised time; the smallest of three"
const SPOKEN = 0.05

/**
 * Do events gather on the circle: Rayleigh's test sees one broad gathering, Kuiper's any shape, the scan a narrow one
 * among events at random.
 *
 * @see Mardia & Jupp (2000), Directional Statistics, sections 6.3.1 and 6.3.2; Naus (1965), JASA 60, 532-538
 */
export function circleTests(circle: DayCircle, times: readonly number[]): CircleTests {
  const places = times.map(circle.placeOf)
  const gathering = rayleigh(places, 1)
  const shape = kuiper(places, 1)
  const scan = circleScan(places)
  const { direction } = meanDirection(places, 1)
  const narrow =
    3 * scan.p >= SPOKEN
      ? null
      : {
          fromMinute: circle.minuteAt(scan.from),
          untilMinute: circle.minuteAt(scan.until),
          within: scan.within,
          expected: scan.expected,
        }
  return {
    p: Math.min(1, 3 * Math.min(gathering.p, shape.p, scan.p)),
    resultant: gathering.resultant,
    places,
    narrow,
    middle: 3 * gathering.p >= SPOKEN || direction === null ? null : circle.minuteAt(direction),
    figures: { rayleighP: gathering.p, kuiperP: shape.p, scanP: scan.p },
  }
}
