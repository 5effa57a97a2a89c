import { type View, xOf } from './view.ts'

/** A trip on the strip: an instant (`from === to`), or somewhere between two. */
export interface TripMark {
  /** 1 for the earliest of the period. */
  readonly number: number
  readonly from: number
  readonly to: number
}

/** Where a flag stands: px from the left of the plot, and its row from the plot upwards. */
export interface FlagPlace {
  readonly mark: TripMark
  /** Left edge of the number's box. */
  readonly left: number
  /** The bracket of an interval, or the foot of an instant (`x0 === x1`). */
  readonly x0: number
  readonly x1: number
  readonly row: number
}

/**
 * Places flags so that none hides another: first free row from the plot upwards, by time. A flag takes the width of its
 * box and its bracket. Flags outside the view are left out; boxes stay inside the plot.
 */
export function placeFlags(marks: readonly TripMark[], view: View, width: number, box: number, gap = 3): FlagPlace[] {
  const rows: number[] = []
  const places: FlagPlace[] = []
  for (const mark of [...marks].sort((a, b) => a.from - b.from || a.to - b.to || a.number - b.number)) {
    if (mark.to < view.from || mark.from > view.to) continue
    const x0 = Math.max(0, xOf(mark.from, view, width))
    const x1 = Math.min(width, xOf(mark.to, view, width))
    const left = Math.min(Math.max(0, (x0 + x1) / 2 - box / 2), Math.max(0, width - box))
    const start = Math.min(left, x0)
    const end = Math.max(left + box, x1) + gap
    const free = rows.findIndex((until) => until <= start)
    const row = free === -1 ? rows.length : free
    rows[row] = end
    places.push({ mark, left, x0, x1, row })
  }
  return places
}
