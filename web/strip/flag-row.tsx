import type { JSX } from 'preact'
import type { SiteClock } from '../format/site-clock.ts'
import { words } from '../words.ts'
import { placeFlags, type TripMark } from './flags.ts'
import type { View } from './view.ts'

interface FlagRowProps {
  readonly marks: readonly TripMark[]
  readonly view: View
  readonly width: number
  readonly clock: SiteClock
  readonly onShow: (mark: TripMark) => void
}

const BOX = 24
const ROW = 28

/** Trips as numbered flags above the trace; a trip known only as an interval has a bracket over it. */
export function FlagRow({ marks, view, width, clock, onShow }: FlagRowProps): JSX.Element | null {
  if (marks.length === 0) return null
  const places = placeFlags(marks, view, width, BOX)
  const rows = Math.max(1, ...places.map((place) => place.row + 1))
  const height = rows * ROW
  return (
    <div class="flags" style={{ height: `${height}px`, width: `${width}px` }}>
      {places.map(({ mark, left, x0, x1, row }) => {
        const instant = mark.from === mark.to
        const top = height - (row + 1) * ROW
        const text = instant
          ? words.strip.trip(mark.number, clock.exactMoment(mark.from))
          : words.strip.tripBetween(mark.number, clock.span(mark.from, mark.to))
        return (
          <div key={mark.number}>
            {instant ? (
              <span
                class="flag-pole"
                style={{ left: `${x0}px`, top: `${top + 20}px`, height: `${height - top - 20}px` }}
              />
            ) : (
              <span
                class="flag-bracket"
                style={{ left: `${x0}px`, width: `${Math.max(2, x1 - x0)}px`, top: `${top + 22}px` }}
              />
            )}
            <button
              type="button"
              class="flag-button flag"
              tabIndex={-1}
              title={text}
              aria-label={text}
              style={{ left: `${left}px`, top: `${top}px`, width: `${BOX}px` }}
              onClick={() => onShow(mark)}
            >
              {mark.number}
            </button>
          </div>
        )
      })}
    </div>
  )
}
