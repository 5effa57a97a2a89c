import type { Series } from './series.ts'

/** A stretch of a log that reads about nothing. Times are epoch ms of readings. */
export interface DeadRun {
  /** Last reading before the fall; null when the log begins dead. */
  readonly lastLive: number | null
  /** First and last reading of about nothing. */
  readonly from: number
  readonly lastDead: number
  /** First reading of a level that has come back to stay (two readings); null when it does not come back. */
  readonly back: number | null
  readonly count: number
  /** At least four in five of its readings are about nothing; the rest flickers between nothing and a level. */
  readonly steady: boolean
  /** Median of at most five readings before the fall; null when the log begins dead. */
  readonly before: number | null
  /** The fall took no more than one reading between the level and nothing. */
  readonly sharp: boolean
}

/** What counts as nothing in a log. */
export interface DeadLevel {
  /** Below: nothing. */
  readonly nothing: number
  /** At or above: something again. */
  readonly alive: number
}

/** What is usual in a leakage log, and what is nothing beside it. */
export interface UsualLevel extends DeadLevel {
  readonly usual: number
  /** The log reads about nothing most of the time, so that a fall to nothing says little. */
  readonly mostlyNothing: boolean
}

/** Below this much usual leakage, mA, a log cannot show that the supply is gone. */
const LEAST_USUAL_MA = 0.2
/** About nothing: below 5 % of the usual, or below 0.3 mA where that is still little beside the usual. */
const NOTHING_SHARE = 0.05
const NOTHING_MA = 0.3
const LITTLE_SHARE = 0.2
const SAMPLE = 10_001

/** The usual level of a leakage log: its median, over at most 10,001 readings spread evenly. Null when too low to tell. */
export function usualLevel({ v }: Series): UsualLevel | null {
  const n = Math.min(v.length, SAMPLE)
  if (n < 3) return null
  const x = Float64Array.from({ length: n }, (_, k) => Math.abs(v[Math.floor((k * (v.length - 1)) / (n - 1))]!)).sort()
  const median = x[n >>> 1]!
  const high = x[Math.floor(0.9 * (n - 1))]!
  const mostlyNothing = median < Math.max(LEAST_USUAL_MA, NOTHING_SHARE * high)
  const usual = mostlyNothing ? high : median
  if (usual < LEAST_USUAL_MA) return null
  const nothing = Math.max(NOTHING_SHARE * usual, Math.min(NOTHING_MA, LITTLE_SHARE * usual))
  return { usual, mostlyNothing, nothing, alive: 2 * nothing }
}

/** The stretches of a log that read about nothing, in order. O(n). */
export function deadRuns({ t, v }: Series, { nothing, alive }: DeadLevel): DeadRun[] {
  const runs: DeadRun[] = []
  for (let i = 0; i < t.length; i++) {
    if (v[i]! >= nothing) continue
    let end = i + 1
    let lastDead = i
    let count = 1
    while (end < t.length && !staysAlive(v, end, alive)) {
      if (v[end]! < nothing) {
        lastDead = end
        count++
      }
      end++
    }
    const before = i === 0 ? null : medianBefore(v, i)
    const half = before === null ? 0 : before / 2
    runs.push({
      lastLive: i === 0 ? null : t[i - 1]!,
      from: t[i]!,
      lastDead: t[lastDead]!,
      back: end < t.length ? t[end]! : null,
      count,
      steady: count >= 0.8 * (end - i),
      before,
      sharp: i > 0 && before! >= 3 * nothing && (v[i - 1]! >= half || (i > 1 && v[i - 2]! >= half)),
    })
    i = end - 1
  }
  return runs
}

/** One reading above may be noise; two in a row, or one that is the last of all, are a level. */
function staysAlive(v: Float64Array, i: number, alive: number): boolean {
  return v[i]! >= alive && (i + 1 === v.length || v[i + 1]! >= alive)
}

function medianBefore(v: Float64Array, i: number): number {
  const x = v.slice(Math.max(0, i - 5), i).sort()
  return x[x.length >>> 1]!
}
