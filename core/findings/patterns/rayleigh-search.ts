import { type Spans, totalMs } from '../../timeline/spans.ts'

const HOUR_MS = 3_600_000
/** Peaks that are looked at closely, and the least share of the largest power that makes one. */
const MOST_PEAKS = 60
const LEAST_SHARE = 0.4
/** Share of the largest power that counts as as large. */
const ALIKE = 0.8

/** The strongest of many frequencies. */
export interface Strongest {
  /** Its Rayleigh power, n times the squared resultant. */
  readonly power: number
  /** Number of the frequency: of those about as strong the lowest, for whole fractions of a period fit as well as it does. */
  readonly at: number
  readonly cos: Float64Array
  readonly sin: Float64Array
}

/** Sums cosines and sines of event times (h) over evenly spaced frequencies (1/h); each angle is turned on from the one before. */
export function strongest(hours: readonly number[], frequencies: Float64Array): Strongest {
  const count = frequencies.length
  const cos = new Float64Array(count)
  const sin = new Float64Array(count)
  const step = count < 2 ? 0 : frequencies[1]! - frequencies[0]!
  for (const h of hours) {
    let x = Math.cos(2 * Math.PI * frequencies[0]! * h)
    let y = Math.sin(2 * Math.PI * frequencies[0]! * h)
    const turnX = Math.cos(2 * Math.PI * step * h)
    const turnY = Math.sin(2 * Math.PI * step * h)
    for (let k = 0; k < count; k++) {
      cos[k]! += x
      sin[k]! += y
      const next = x * turnX - y * turnY
      y = x * turnY + y * turnX
      x = next
    }
  }
  const square = (k: number): number => cos[k]! ** 2 + sin[k]! ** 2
  let most = 0
  for (let k = 0; k < count; k++) most = Math.max(most, square(k))
  let at = 0
  while (at + 1 < count && square(at) < ALIKE * most) at++
  while (at + 1 < count && square(at + 1) > square(at)) at++
  return { power: most / hours.length, at, cos, sin }
}

/**
 * Bound on the chance that events thrown over energised time reach the strongest frequency: at each high peak the resultant is taken from
 * the one that the energised time itself has there, so that supply with a rhythm is no period; the rest is about exponential
 * (Mardia & Jupp 2000, §4.8), and all frequencies are paid for (Boole's inequality).
 */
export function strongestBound(
  { power, cos, sin }: Strongest,
  n: number,
  frequencies: Float64Array,
  energised: Spans,
  from: number,
): number {
  const square = (k: number): number => cos[k]! ** 2 + sin[k]! ** 2
  const peaks: number[] = []
  for (let k = 0; k < frequencies.length; k++) {
    const isPeak = square(k) >= (square(k - 1) || 0) && square(k) >= (square(k + 1) || 0)
    if (isPeak && square(k) >= LEAST_SHARE * power * n) peaks.push(k)
  }
  peaks.sort((a, b) => square(b) - square(a))
  let most = 0
  for (const k of peaks.slice(0, MOST_PEAKS)) {
    const usual = resultantOf(energised, frequencies[k]!, from)
    const beyond = (cos[k]! / n - usual.cos) ** 2 + (sin[k]! / n - usual.sin) ** 2
    most = Math.max(most, (n * beyond) / Math.max(1e-9, 1 - usual.cos ** 2 - usual.sin ** 2))
  }
  return Math.min(1, frequencies.length * Math.exp(-most))
}

/** Mean cosine and sine of a frequency (1/h) over a set of time, by its integral. */
function resultantOf(spans: Spans, frequency: number, from: number): { readonly cos: number; readonly sin: number } {
  const turn = (2 * Math.PI * frequency) / HOUR_MS
  let [cos, sin] = [0, 0]
  for (let i = 0; i < spans.length; i += 2) {
    const [a, b] = [(spans[i]! - from) * turn, (spans[i + 1]! - from) * turn]
    cos += Math.sin(b) - Math.sin(a)
    sin += Math.cos(a) - Math.cos(b)
  }
  const all = totalMs(spans) * turn
  return all === 0 ? { cos: 0, sin: 0 } : { cos: cos / all, sin: sin / all }
}
