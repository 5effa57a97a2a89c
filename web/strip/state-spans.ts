import type { Trace } from '../../core/contract/readings.ts'

export type State = 'on' | 'off' | 'unknown'

/** A stretch of time with one state, [from, to), epoch ms. */
export interface StateSpan {
  readonly from: number
  readonly to: number
  readonly state: State
}

/** A change of state that somebody wrote down. */
export interface WrittenChange {
  readonly at: number
  readonly on: boolean
}

/** Joins neighbours of the same state and drops empty spans. Spans come in order of time. */
export function joined(spans: readonly StateSpan[]): StateSpan[] {
  const out: StateSpan[] = []
  for (const span of spans) {
    if (span.to <= span.from) continue
    const last = out[out.length - 1]
    if (last && last.state === span.state && last.to >= span.from) out[out.length - 1] = { ...last, to: span.to }
    else out.push(span)
  }
  return out
}

/** States from written changes: `before` until the first one, then as written. */
export function spansOfChanges(
  changes: readonly WrittenChange[],
  before: State,
  from: number,
  to: number,
): StateSpan[] {
  const spans: StateSpan[] = []
  let state = before
  let since = from
  for (const change of [...changes].sort((a, b) => a.at - b.at)) {
    if (change.at >= to) break
    if (change.at > since) {
      spans.push({ from: since, to: change.at, state })
      since = change.at
    }
    state = change.on ? 'on' : 'off'
  }
  spans.push({ from: since, to, state })
  return joined(spans)
}

/**
 * States from a channel of quantity running: each reading holds until the next; unknown in gaps (null in the trace),
 * before the first reading and after the last.
 */
export function spansOfTrace(trace: Trace, from: number, to: number): StateSpan[] {
  const spans: StateSpan[] = []
  const { t, v } = trace
  let since = from
  let state: State = 'unknown'
  for (let i = 0; i < t.length; i++) {
    const at = Math.min(Math.max(t[i]!, from), to)
    const value = v[i] ?? null
    const next: State = value === null ? 'unknown' : value >= 0.5 ? 'on' : 'off'
    if (next === state) continue
    spans.push({ from: since, to: at, state })
    since = at
    state = next
  }
  const end = t.length === 0 ? from : Math.min(to, Math.max(from, t[t.length - 1]!))
  spans.push({ from: since, to: Math.max(since, end), state }, { from: Math.max(since, end), to, state: 'unknown' })
  return joined(spans)
}

/** The same spans, but off wherever `mask` is off: a load on a circuit that is off, anything behind an open device. */
export function offWhere(spans: readonly StateSpan[], mask: readonly StateSpan[]): StateSpan[] {
  const out: StateSpan[] = []
  let m = 0
  for (const span of spans) {
    let at = span.from
    while (at < span.to) {
      while (m < mask.length && mask[m]!.to <= at) m++
      const over = mask[m]
      const covered = over !== undefined && over.from <= at
      const until = Math.min(span.to, over === undefined ? span.to : covered ? over.to : over.from)
      out.push({ from: at, to: until, state: covered && over.state === 'off' ? 'off' : span.state })
      at = until
    }
  }
  return joined(out)
}

/** State at an instant; unknown outside all spans. O(log n). */
export function stateAt(spans: readonly StateSpan[], t: number): State {
  let low = 0
  let high = spans.length
  while (low < high) {
    const middle = (low + high) >>> 1
    if (spans[middle]!.to <= t) low = middle + 1
    else high = middle
  }
  const span = spans[low]
  return span !== undefined && span.from <= t ? span.state : 'unknown'
}

/** How long each state held, ms, and how often it went on. */
export function tally(spans: readonly StateSpan[]): Readonly<Record<State, number>> & { readonly starts: number } {
  const sum = { on: 0, off: 0, unknown: 0, starts: 0 }
  spans.forEach((span, i) => {
    sum[span.state] += span.to - span.from
    if (span.state === 'on' && i > 0 && spans[i - 1]!.state === 'off') sum.starts++
  })
  return sum
}
