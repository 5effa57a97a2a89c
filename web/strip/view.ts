/** A stretch of time on the strip, [from, to), epoch ms. */
export interface View {
  readonly from: number
  readonly to: number
}

/** Nothing finer than ten seconds across is worth looking at. */
export const LEAST_SPAN = 10_000

export function spanOf(view: View): number {
  return view.to - view.from
}

/** The view of the same length (at most the whole) that lies within the whole. */
export function within(view: View, whole: View): View {
  const span = Math.min(Math.max(spanOf(view), Math.min(LEAST_SPAN, spanOf(whole))), spanOf(whole))
  const from = Math.min(Math.max(view.from, whole.from), whole.to - span)
  return { from, to: from + span }
}

/** Zooms by a factor (below 1 is closer) so that the instant `anchor` stays where it is. */
export function zoomed(view: View, whole: View, factor: number, anchor: number): View {
  const span = Math.min(Math.max(spanOf(view) * factor, LEAST_SPAN), spanOf(whole))
  const share = (anchor - view.from) / spanOf(view)
  const from = anchor - share * span
  return within({ from, to: from + span }, whole)
}

/** Moves the view by a share of its own length; to the right for a positive share. */
export function moved(view: View, whole: View, share: number): View {
  const by = spanOf(view) * share
  return within({ from: view.from + by, to: view.to + by }, whole)
}

export function isWhole(view: View, whole: View): boolean {
  return view.from <= whole.from && view.to >= whole.to
}

export function sameView(a: View, b: View): boolean {
  return a.from === b.from && a.to === b.to
}

/** Where an instant lies in a view of this width, px. */
export function xOf(t: number, view: View, width: number): number {
  return ((t - view.from) / spanOf(view)) * width
}

export function timeAt(x: number, view: View, width: number): number {
  return view.from + (x / width) * spanOf(view)
}
