import { complement, spansOf } from '../../timeline/spans.ts'
import { nightSpans, sunTimes } from '../../timeline/sun.ts'
import type { ExposureWindow } from '../line-up.ts'
import { type Frame, MINUTE_MS, normalised, windowOf } from './trip-share.ts'

const DAY_MS = 86_400_000

/** Minutes before and after sunset or sunrise that are tried. */
const ROUND_SUNSET = [
  [-15, 15],
  [-30, 30],
  [0, 30],
  [0, 60],
  [0, 120],
  [-60, 0],
] as const
const ROUND_SUNRISE = [
  [-15, 15],
  [-30, 30],
  [0, 60],
  [-60, 0],
] as const

/** What follows the sun: round sunset, round sunrise, and the whole night. Empty without coordinates. */
export function sunWindows(frame: Frame): ExposureWindow[] {
  const { timeline } = frame
  const { latitude, longitude } = timeline.sheet
  if (latitude === undefined || longitude === undefined) return []
  const sets: number[] = []
  const rises: number[] = []
  for (let day = timeline.from - DAY_MS; day < timeline.to + DAY_MS; day += DAY_MS) {
    const { sunrise, sunset } = sunTimes(day, latitude, longitude)
    if (sunset !== null) sets.push(sunset)
    if (sunrise !== null) rises.push(sunrise)
  }
  const all = spansOf([[timeline.from, timeline.to]])
  const round = (times: readonly number[], name: string, from: number, to: number): ExposureWindow | null =>
    windowOf(
      frame,
      `${name}${from}..${to}`,
      from < 0 && to > 0
        ? `within ${to} minutes of ${name}`
        : `in the ${to - from} minutes ${from < 0 ? 'before' : 'after'} ${name}`,
      1,
      spansOf(times.map((t) => [t + from * MINUTE_MS, t + to * MINUTE_MS] as const)),
      all,
    )
  const night = nightSpans(timeline.from, timeline.to, latitude, longitude)
  return normalised([
    ...ROUND_SUNSET.map(([from, to]) => round(sets, 'sunset', from, to)),
    ...ROUND_SUNRISE.map(([from, to]) => round(rises, 'sunrise', from, to)),
    windowOf(frame, 'night', 'in the dark', 1, night, all),
    windowOf(frame, 'day', 'in daylight', 1, complement(night, timeline.from, timeline.to), all),
  ])
}
