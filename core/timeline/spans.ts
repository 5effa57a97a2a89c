import { CoreError } from '../errors.ts'

/**
 * Sets of time as sorted, disjoint, half-open intervals [from, to), epoch ms, flattened: from0, to0, from1, to1, …
 * Touching intervals are one. All functions leave their inputs alone and run in linear time.
 */
export type Spans = Float64Array

/** The empty set. */
export const NO_SPANS: Spans = new Float64Array(0)

/** One interval of a set. */
export interface Span {
  readonly from: number
  readonly to: number
}

/**
 * Makes a set of any pairs [from, to): sorts them, merges what overlaps or touches, drops what is empty or backwards.
 * O(n log n). @throws {CoreError} not_finite
 */
export function spansOf(pairs: Iterable<readonly [number, number]>): Spans {
  const sorted: (readonly [number, number])[] = []
  for (const pair of pairs) {
    if (!Number.isFinite(pair[0]) || !Number.isFinite(pair[1]))
      throw new CoreError('not_finite', `spansOf got [${pair[0]}, ${pair[1]})`)
    if (pair[0] < pair[1]) sorted.push(pair)
  }
  sorted.sort((a, b) => a[0] - b[0])
  const out: number[] = []
  for (const [from, to] of sorted) {
    const last = out.length - 1
    if (last > 0 && from <= out[last]!) out[last] = Math.max(out[last]!, to)
    else out.push(from, to)
  }
  return Float64Array.from(out)
}

/** Time in a, in b, or in both. */
export function union(a: Spans, b: Spans): Spans {
  if (a.length === 0) return b.slice()
  if (b.length === 0) return a.slice()
  return combine(a, b, (inA, inB) => inA || inB)
}

/** Time in a and in b. */
export function intersect(a: Spans, b: Spans): Spans {
  const out = new Float64Array(a.length + b.length)
  let n = 0
  for (let i = 0, j = 0; i < a.length && j < b.length; ) {
    const from = Math.max(a[i]!, b[j]!)
    const to = Math.min(a[i + 1]!, b[j + 1]!)
    if (from < to) {
      out[n++] = from
      out[n++] = to
    }
    if (a[i + 1]! < b[j + 1]!) i += 2
    else j += 2
  }
  return out.slice(0, n)
}

/** Length of the time in a and in b, ms: as `totalMs(intersect(a, b))` without making it. */
export function overlapMs(a: Spans, b: Spans): number {
  let total = 0
  for (let i = 0, j = 0; i < a.length && j < b.length; ) {
    const length = Math.min(a[i + 1]!, b[j + 1]!) - Math.max(a[i]!, b[j]!)
    if (length > 0) total += length
    if (a[i + 1]! < b[j + 1]!) i += 2
    else j += 2
  }
  return total
}

/** Time in a that is not in b. */
export function subtract(a: Spans, b: Spans): Spans {
  if (b.length === 0) return a.slice()
  return combine(a, b, (inA, inB) => inA && !inB)
}

/** Time of [from, to) that is not in the set. */
export function complement(spans: Spans, from: number, to: number): Spans {
  return subtract(spansOf([[from, to]]), spans)
}

/** The part of the set within [from, to). */
export function clip(spans: Spans, from: number, to: number): Spans {
  return intersect(spans, spansOf([[from, to]]))
}

/** The set moved by `ms`, later when positive. */
export function shift(spans: Spans, ms: number): Spans {
  return spans.map((edge) => edge + ms)
}

/**
 * Every interval begun `before` ms earlier and ended `after` ms later; what then overlaps is merged. Negative numbers
 * narrow; what is narrowed to nothing goes.
 */
export function widen(spans: Spans, before: number, after: number): Spans {
  const pairs: [number, number][] = []
  for (let i = 0; i < spans.length; i += 2) pairs.push([spans[i]! - before, spans[i + 1]! + after])
  return spansOf(pairs)
}

/** Length of the set, ms. */
export function totalMs(spans: Spans): number {
  let total = 0
  for (let i = 0; i < spans.length; i += 2) total += spans[i + 1]! - spans[i]!
  return total
}

/** How much of [from, to) the set covers, ms. O(log n + intervals touched). */
export function measureWithin(spans: Spans, from: number, to: number): number {
  let total = 0
  for (let i = firstEndingAfter(spans, from); i < spans.length && spans[i]! < to; i += 2) {
    total += Math.max(0, Math.min(spans[i + 1]!, to) - Math.max(spans[i]!, from))
  }
  return total
}

/** Whether the instant lies in the set. O(log n). */
export function contains(spans: Spans, t: number): boolean {
  const i = firstEndingAfter(spans, t)
  return i < spans.length && spans[i]! <= t
}

/** The interval of the set that holds the instant, or undefined. O(log n). */
export function spanAt(spans: Spans, t: number): Span | undefined {
  const i = firstEndingAfter(spans, t)
  return i < spans.length && spans[i]! <= t ? { from: spans[i]!, to: spans[i + 1]! } : undefined
}

/** The intervals one by one, in order. */
export function* eachSpan(spans: Spans): Generator<Span> {
  for (let i = 0; i < spans.length; i += 2) yield { from: spans[i]!, to: spans[i + 1]! }
}

/** How many intervals the set has. */
export function countSpans(spans: Spans): number {
  return spans.length >>> 1
}

/** Flat index of the first interval that ends after t; the length when there is none. */
function firstEndingAfter(spans: Spans, t: number): number {
  let low = 0
  let high = spans.length >>> 1
  while (low < high) {
    const middle = (low + high) >>> 1
    if (spans[2 * middle + 1]! <= t) low = middle + 1
    else high = middle
  }
  return 2 * low
}

/** Walks the edges of both sets once and keeps the time for which `keep` says so. */
function combine(a: Spans, b: Spans, keep: (inA: boolean, inB: boolean) => boolean): Spans {
  const out = new Float64Array(a.length + b.length)
  let n = 0
  let i = 0
  let j = 0
  let open = false
  while (i < a.length || j < b.length) {
    const t = Math.min(i < a.length ? a[i]! : Number.POSITIVE_INFINITY, j < b.length ? b[j]! : Number.POSITIVE_INFINITY)
    // An odd index means: the interval has begun and not yet ended.
    if (a[i] === t) i++
    if (b[j] === t) j++
    const now = keep((i & 1) === 1, (j & 1) === 1)
    if (now !== open) {
      out[n++] = t
      open = now
    }
  }
  return out.slice(0, n)
}
