import { holm } from '../statistics/holm.ts'
import { poissonRateRatio } from '../statistics/poisson-rate-ratio.ts'
import type { ExposureWindow } from './line-up.ts'

/** Whether trips prefer the time inside a window to the time outside. */
export interface Preference {
  readonly of: string
  readonly window: ExposureWindow
  /** Trips inside; a share for trips known as intervals. */
  readonly inside: number
  readonly trips: number
  /** Trips expected inside if they fell anywhere. */
  readonly expected: number
  /** Ratio of the rates inside and outside with 90 % limits; infinite when all fell inside. */
  readonly ratio: number | null
  readonly low: number
  readonly high: number
  /** One-sided exact p, and the same adjusted by Holm for every window tried here. */
  readonly p: number
  readonly pAdjusted: number
}

/**
 * Exact conditional tests of rates inside against outside (Przyborowski & Wilenski 1940), one a window, adjusted
 * together (Holm 1979). Trips spread over an interval count as the whole number next below their expected count, so
 * that spreading never makes a test bolder.
 */
export function preferences(
  hours: number,
  trips: number,
  windows: readonly { readonly of: string; readonly window: ExposureWindow }[],
): Preference[] {
  const tests = windows.map(({ of, window }) => {
    let inside = 0
    for (const share of window.inside) inside += share
    const count = Math.min(trips, Math.floor(inside + 1e-9))
    const outside = Math.max(1e-9, hours - window.insideHours)
    const test = poissonRateRatio([count, trips - count], [window.insideHours, outside], { confidence: 0.9 })
    return {
      of,
      window,
      inside,
      trips,
      expected: (trips * window.insideHours) / hours,
      ratio: test.ratio,
      low: test.low,
      high: test.high,
      p: test.pGreater,
    }
  })
  const adjusted = holm(tests.map((t) => t.p))
  return tests.map((t, i) => ({ ...t, pAdjusted: adjusted[i]! }))
}
