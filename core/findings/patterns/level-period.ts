import type { Pattern } from '../../contract/findings.ts'
import { lombScargle } from '../../statistics/lomb-scargle.ts'
import { quantile } from '../../statistics/quantile.ts'
import { current, figure, rounded } from '../words.ts'
import type { Hourly } from './hourly.ts'

const LONGEST_HOURS = 240
const LEAST_TURNS = 6
const LEAST_POINTS = 96
/** Points and frequencies that the periodogram may cost. */
const MOST_POINTS = 1_500
const MOST_FREQUENCIES = 1_000
/** Oversampled by two, so that no period falls between. */
const OVERSAMPLE = 2
/** Frequencies on each side that tell what power is usual there. */
const BESIDE = 20
/** Frequencies on one side that make a median. */
const LEAST_BESIDE = 6
const SPOKEN = 0.001
const METHOD =
  'Lomb–Scargle periodogram (Lomb 1976; Scargle 1982) of hourly levels against the median power round each period (Mann & Lees 1996), all periods paid for'

/**
 * Whether the leakage itself swings with a period, whatever the named loads do: Lomb–Scargle power against the median power of the
 * frequencies round it, which holds the slow wander every level has. `level` is what no named thing accounts for, hour by hour.
 */
export function levelPeriod(level: Hourly | null): Pattern {
  if (level === null) return { verdict: 'No leakage is logged, or too little to see a period in it.', p: null }
  const { t, v } = thinnedOut(level)
  const span = level.v.length * level.step
  const longest = Math.min(LONGEST_HOURS, span / LEAST_TURNS)
  const shortest = t.length < 2 ? span : (4 * span) / t.length
  if (t.length < LEAST_POINTS || longest < 2 * shortest) {
    return { verdict: 'The log is too short to see a period in the leakage: let the logger stay longer.', p: null }
  }
  const step = 1 / (OVERSAMPLE * span)
  const count = Math.min(MOST_FREQUENCIES, Math.floor((1 / shortest - 1 / longest) / step) + 1)
  // two turns more on the long side, so that the power there is known too
  const lead = Math.round((1 / longest - 2 / span) / step)
  const frequencies = Float64Array.from({ length: lead + count }, (_, k) => 1 / longest + (k - lead) * step)
  const spread = quantile(v, 0.9) - quantile(v, 0.1)
  if (!(spread > 0)) return { verdict: 'The leakage did not change.', p: null }
  const { power } = lombScargle(t, v, frequencies, { floatingMean: true })
  // the strongest of those that stand out
  let [at, most] = [lead, 0]
  for (let k = lead; k < power.length; k++) {
    const z = power[k]! / Math.max(1e-12, usualPower(power, k))
    const stands = (count / OVERSAMPLE) * Math.exp(-z) < SPOKEN
    const stood = (count / OVERSAMPLE) * Math.exp(-most) < SPOKEN
    if (stands === stood ? (stands ? power[k]! > power[at]! : z > most) : stands) [at, most] = [k, z]
  }
  const p = Math.min(1, (count / OVERSAMPLE) * Math.exp(-most))
  const hours = 1 / frequencies[at]!
  const figures = { p: rounded(p), method: METHOD, periods: count, share: rounded(power[at]!) }
  if (p >= SPOKEN) {
    return {
      verdict: `The leakage keeps no period between ${figure(shortest)} and ${figure(longest)} hours.`,
      ...figures,
    }
  }
  const swing = 2 * Math.sqrt(2 * power[at]! * varianceOf(v))
  const said = `by about ${current(swing)} mA from low to high`
  const parts = Math.round(24 / hours)
  const isOfDay = parts >= 1 && Math.abs(24 / hours - parts) < 24 * step
  const often = parts === 1 ? '' : `, most clearly ${parts} times a day`
  return {
    verdict: isOfDay
      ? `The leakage itself swings with the day${often}, ${said}.`
      : `The leakage itself swings with a period of ${figure(hours)} hours, ${said}.`,
    ...figures,
    hours: rounded(hours),
    swingMa: rounded(swing),
  }
}

/** Mean power of noise round a frequency: the larger of both sides' medians (that of an exponential distribution is its mean times ln 2). */
function usualPower(power: Float64Array, k: number): number {
  const left = power.subarray(Math.max(0, k - BESIDE), Math.max(0, k - 1))
  const right = power.subarray(k + 2, k + BESIDE + 1)
  const sides = [left, right].filter((side) => side.length >= LEAST_BESIDE).map((side) => quantile(side, 0.5))
  return sides.length === 0 ? 1 : Math.max(...sides) / Math.LN2
}

/** Means of neighbouring stretches when there are more than the periodogram can bear; gaps are left out. Times in hours. */
function thinnedOut({ v, step }: Hourly): { readonly t: Float64Array; readonly v: Float64Array } {
  const width = Math.max(1, Math.ceil(v.length / MOST_POINTS))
  const t: number[] = []
  const means: number[] = []
  for (let i = 0; i < v.length; i += width) {
    const known = v.subarray(i, i + width).filter(Number.isFinite)
    if (known.length === 0) continue
    t.push((i + width / 2) * step)
    means.push(known.reduce((sum, x) => sum + x, 0) / known.length)
  }
  return { t: Float64Array.from(t), v: Float64Array.from(means) }
}

function varianceOf(v: Float64Array): number {
  const mean = v.reduce((sum, x) => sum + x, 0) / v.length
  return v.reduce((sum, x) => sum + (x - mean) ** 2, 0) / v.length
}
