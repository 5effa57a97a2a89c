import type { JSX } from 'preact'
import { duration } from '../format/duration.ts'
import type { SiteClock } from '../format/site-clock.ts'
import type { Live } from '../sheet/use-live.ts'
import { words } from '../words.ts'
import { LiveMark } from './live-mark.tsx'
import { isWhole, moved, spanOf, type View, zoomed } from './view.ts'

interface StripControlsProps {
  readonly view: View
  readonly whole: View
  readonly clock: SiteClock
  readonly live: Live
  readonly onView: (view: View) => void
}

/** What is shown, and buttons for those who neither drag nor pinch. */
export function StripControls({ view, whole, clock, live, onView }: StripControlsProps): JSX.Element {
  const say = words.strip
  const centre = (view.from + view.to) / 2
  const all = isWhole(view, whole)
  return (
    <div class="strip-controls">
      <p class="aside">
        {say.showing(clock.span(view.from, view.to), duration(spanOf(view)))} <LiveMark live={live} />
      </p>
      <div class="buttons">
        <button type="button" aria-label={say.earlier} disabled={all} onClick={() => onView(moved(view, whole, -0.5))}>
          ←
        </button>
        <button type="button" aria-label={say.later} disabled={all} onClick={() => onView(moved(view, whole, 0.5))}>
          →
        </button>
        <button type="button" aria-label={say.closer} onClick={() => onView(zoomed(view, whole, 0.4, centre))}>
          +
        </button>
        <button
          type="button"
          aria-label={say.wider}
          disabled={all}
          onClick={() => onView(zoomed(view, whole, 2.5, centre))}
        >
          −
        </button>
        <button type="button" disabled={all} onClick={() => onView(whole)}>
          {say.whole}
        </button>
      </div>
    </div>
  )
}
