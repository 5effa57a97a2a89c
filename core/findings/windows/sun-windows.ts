import { complement, spansOf } from '../../timeline/spans.ts'
import { nightSpans, sunTimes } from '../../timeline/sun.ts'
import type { ExposureWindow } from '../line-up.ts'
import { type Frame, MINUTE_MS, normalised, windowOf } from './trip-share.ts'

const DAY_MS = 86_400_000

/** Widths of a window round sunset or sunrise that are tried, and how far from it they reach, minutes. */
const WIDTHS = [10, 20, 40, 90] as const
const EARLIEST = -60
const LATEST = 150

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
  const windows: (ExposureWindow | null)[] = []
  for (const [times, name] of [
    [sets, 'sunset'],
    [rises, 'sunrise'],
  ] as const) {
    for (const width of WIDTHS) {
      const count = Math.floor((LATEST - EARLIEST - width) / (width / 2)) + 1
      for (let k = 0; k < count; k++) {
        const from = EARLIEST + (k * width) / 2
        const spans = spansOf(times.map((t) => [t + from * MINUTE_MS, t + (from + width) * MINUTE_MS] as const))
        windows.push(
          windowOf(
            frame,
            `${name}${from}..${from + width}`,
            roundWords(name, from, from + width),
            1 / count,
            spans,
            all,
          ),
        )
      }
    }
  }
  const night = nightSpans(timeline.from, timeline.to, latitude, longitude)
  const day = complement(night, timeline.from, timeline.to)
  windows.push(
    windowOf(frame, 'night', 'in the dark', 1, night, all),
    windowOf(frame, 'day', 'in daylight', 0.5, day, all),
  )
  return normalised(windows)
}

function roundWords(name: string, from: number, to: number): string {
  if (from === 0) return `in the ${to} minutes after ${name}`
  if (to === 0) return `in the ${-from} minutes before ${name}`
  if (from < 0 && to > 0) return `from ${-from} minutes before to ${to} minutes after ${name}`
  return from < 0 ? `from ${-from} to ${-to} minutes before ${name}` : `from ${from} to ${to} minutes after ${name}`
}
