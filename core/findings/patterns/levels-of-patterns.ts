import type { Series } from '../../timeline/series.ts'

/** What the log adds to the trips; nulls without one. */
export interface LevelsOfPatterns {
  /** Minute means of the leakage, mA. */
  readonly minutes: Series | null
  /** The same less what named things account for. */
  readonly remainder: Series | null
  /** Whether leakage follows the group's load current whichever load carries it. */
  readonly followsCurrent: boolean | null
}
