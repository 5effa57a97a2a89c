import { type Series, usualInterval } from '../timeline/series.ts'
import { clip, type Spans, spansOf, totalMs } from '../timeline/spans.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import { groupedLevelBetween, meanBetween } from './levels.ts'

const MINUTE_MS = 60_000
/** Only so much of a long piece next to an edge is looked at: over more the level drifts. */
const BESIDE_MS = 60 * MINUTE_MS
/** Pieces too short for a level are bridged, as long as no more than this is skipped. */
const BRIDGE_MS = 10 * MINUTE_MS
/** Watches and loggers differ by minutes: so much round a switching that a person wrote down belongs to neither side. */
const NOTED_MS = 15 * MINUTE_MS
/** Where a circuit with unseen loads is switched, the usual level of so long a time is asked, not what ran just then. */
const LONG_MS = 24 * 60 * MINUTE_MS
/** Levels over less than this say nothing of what is usual. */
const LEAST_LONG_MS = 4 * 60 * MINUTE_MS
/** Most differences without any switching that are taken to measure the wander of the level. */
const MOST_PLACEBOS = 400

/** One difference of neighbouring levels, later less earlier, mA, and what changed between them. */
export interface StepRow {
  readonly at: number
  readonly ma: number
  /** Level before the change, mA. */
  readonly before: number
  /** Positions in `things`, and +1 for on, −1 for off. Empty for a placebo: a place where nothing named changed. */
  readonly things: readonly number[]
  readonly signs: readonly number[]
  /** Whether the levels are means over hours. */
  readonly long: boolean
}

export interface StepRows {
  /** By time. */
  readonly steps: readonly StepRow[]
  readonly placebos: readonly StepRow[]
  /** The same for means over hours; empty where no step asks for them. */
  readonly longPlacebos: readonly StepRow[]
}

interface Piece {
  readonly from: number
  readonly to: number
}

/**
 * Cuts the logged time wherever a circuit or load changes and takes the differences of neighbouring robust levels, a bit
 * away from the edges (methods.md §2), farther where the time is a person's. Where a circuit changes, so do those of its loads that ran on it.
 * Linear in changes × readings looked at near each (at most 401).
 */
export function stepRows(timeline: Timeline, leakage: Series): StepRows {
  const interval = usualInterval(leakage)
  if (Number.isNaN(interval)) return { steps: [], placebos: [], longPlacebos: [] }
  const edges = edgesOf(timeline)
  const blanks = notedSpans(timeline.things)
  const pieces = piecesOf(timeline, edges, blanks, interval)
  const hasUnseen = circuitsWithUnseen(timeline.things)
  const steps: StepRow[] = []
  let e = 0
  let held: { piece: Piece; stretch: number } | null = null
  for (const { piece, stretch } of pieces) {
    if (held !== null && held.stretch === stretch && gapBetween(held.piece.to, piece.from, blanks) <= BRIDGE_MS) {
      while (e < edges.length && edges[e]!.at < held.piece.to) e++
      const changed = new Map<number, number>()
      for (; e < edges.length && edges[e]!.at <= piece.from; e++) {
        const { thing, on } = edges[e]!
        changed.set(thing, (changed.get(thing) ?? 0) + (on ? 1 : -1))
      }
      const long = [...changed.keys()].every((thing) => hasUnseen.has(thing))
      const row = rowOf(leakage, held.piece, piece, interval, changed, long)
      if (row !== null) steps.push(row)
    }
    held = { piece, stretch }
  }
  const long = steps.some((row) => row.long)
  return {
    steps,
    placebos: placebosOf(leakage, pieces, interval),
    longPlacebos: long ? longPlacebosOf(leakage, pieces, interval) : [],
  }
}

interface Edge {
  readonly at: number
  readonly thing: number
  readonly on: boolean
}

function edgesOf(timeline: Timeline): Edge[] {
  const edges: Edge[] = []
  timeline.things.forEach((thing, index) => {
    for (const { at, on } of thing.changes) edges.push({ at, thing: index, on })
  })
  return edges.sort((a, b) => a.at - b.at || a.thing - b.thing)
}

/** Settling time after a change, ms: two readings, at least two seconds. */
function settling(interval: number): number {
  return Math.max(2_000, 2 * interval)
}

/** Time round switchings that somebody wrote down; where they follow each other closely, a third of the way to the next. */
function notedSpans(things: readonly Thing[]): Spans {
  const noted = things
    .filter((thing) => thing.source === 'switching')
    .flatMap((thing) => thing.changes.map(({ at }) => at))
  const times = [...new Set(noted)].sort((a, b) => a - b)
  return spansOf(
    times.map((at, i): [number, number] => [
      at - Math.min(NOTED_MS, (at - (times[i - 1] ?? Number.NEGATIVE_INFINITY)) / 3),
      at + Math.min(NOTED_MS, ((times[i + 1] ?? Number.POSITIVE_INFINITY) - at) / 3),
    ]),
  )
}

/** Time between two pieces, without what was left out on purpose, ms. */
function gapBetween(from: number, to: number, blanks: Spans): number {
  return to > from ? to - from - totalMs(clip(blanks, from, to)) : 0
}

/** Pieces long enough for a level, with the logged stretch each lies in. */
function piecesOf(
  timeline: Timeline,
  edges: readonly Edge[],
  blanks: Spans,
  interval: number,
): { piece: Piece; stretch: number }[] {
  const { logged } = timeline
  const least = settling(interval) + 3 * interval
  const list: { piece: Piece; stretch: number }[] = []
  let e = 0
  let k = 0
  for (let s = 0; s < logged.length; s += 2) {
    let from = logged[s]!
    const end = logged[s + 1]!
    while (e < edges.length && edges[e]!.at < from) e++
    for (;;) {
      const to = e < edges.length && edges[e]!.at < end ? edges[e]!.at : end
      while (k < blanks.length && blanks[k + 1]! <= from) k += 2
      let begin = from
      for (let n = k; n < blanks.length && blanks[n]! < to; n += 2) {
        if (blanks[n]! - begin >= least) list.push({ piece: { from: begin, to: blanks[n]! }, stretch: s })
        begin = blanks[n + 1]!
      }
      if (to - begin >= least) list.push({ piece: { from: begin, to }, stretch: s })
      if (to === end) break
      from = to
      e++
    }
  }
  return list
}

/** Circuits on which a load hangs whose state nobody knows, by position. */
function circuitsWithUnseen(things: readonly Thing[]): Set<number> {
  const unseen = new Set(things.filter((t) => t.kind === 'load' && t.state.on.length === 0).map((t) => t.circuit))
  return new Set(things.flatMap((t, i) => (t.kind === 'circuit' && unseen.has(t.circuit) ? [i] : [])))
}

function rowOf(
  leakage: Series,
  a: Piece,
  b: Piece,
  interval: number,
  changed: ReadonlyMap<number, number>,
  mayBeLong: boolean,
): StepRow | null {
  const things: number[] = []
  const signs: number[] = []
  for (const [thing, sign] of changed) {
    if (sign === 0) continue
    things.push(thing)
    signs.push(Math.sign(sign))
  }
  if (things.length === 0) return null
  const long = mayBeLong && Math.min(a.to - a.from, b.to - b.from) >= LEAST_LONG_MS
  const beside = long ? LONG_MS : BESIDE_MS
  const level = long ? meanBetween : groupedLevelBetween
  const before = level(leakage, Math.max(a.from, a.to - beside) + lead(a, interval), a.to - interval / 2, 2)
  const after = level(leakage, b.from + settling(interval), Math.min(b.to, b.from + beside) - interval / 2, 2)
  if (Number.isNaN(before + after)) return null
  return { at: b.from, ma: after - before, before, things, signs, long }
}

/** What to leave out at the beginning of the earlier piece: its own settling, unless its far end is out of sight anyway. */
function lead(piece: Piece, interval: number): number {
  return piece.to - piece.from > BESIDE_MS ? 0 : settling(interval)
}

/** Differences across places in long pieces where nothing changed: how much the level wanders of itself. */
function placebosOf(
  leakage: Series,
  pieces: readonly { piece: Piece; stretch: number }[],
  interval: number,
): StepRow[] {
  const least = Math.max(4 * MINUTE_MS, 20 * interval)
  const places: { piece: Piece; at: number }[] = []
  for (const { piece } of pieces) {
    const length = piece.to - piece.from
    if (length < least) continue
    const count = Math.max(1, Math.floor(length / (2 * BESIDE_MS)))
    for (let k = 0; k < count; k++) places.push({ piece, at: piece.from + ((k + 0.5) * length) / count })
  }
  const rows: StepRow[] = []
  const stride = Math.max(1, Math.ceil(places.length / MOST_PLACEBOS))
  for (let i = 0; i < places.length; i += stride) {
    const { piece, at } = places[i]!
    const from = Math.max(piece.from + settling(interval), at - BESIDE_MS)
    const to = Math.min(piece.to, at + BESIDE_MS)
    const before = groupedLevelBetween(leakage, from, at - interval / 2, 2)
    const after = groupedLevelBetween(leakage, at + settling(interval), to - interval / 2, 2)
    if (!Number.isNaN(before + after)) rows.push({ at, ma: after - before, before, things: [], signs: [], long: false })
  }
  return rows
}

/** Half of the span of a long placebo: what a switched piece usually offers. */
const LONG_PLACEBO_MS = 12 * 60 * MINUTE_MS

function longPlacebosOf(
  leakage: Series,
  pieces: readonly { piece: Piece; stretch: number }[],
  interval: number,
): StepRow[] {
  const rows: StepRow[] = []
  for (const { piece } of pieces) {
    for (let at = piece.from + LONG_PLACEBO_MS; at + LONG_PLACEBO_MS <= piece.to; at += LONG_PLACEBO_MS) {
      const before = meanBetween(leakage, at - LONG_PLACEBO_MS + settling(interval), at, 2)
      const after = meanBetween(leakage, at, at + LONG_PLACEBO_MS - interval / 2, 2)
      if (!Number.isNaN(before + after))
        rows.push({ at, ma: after - before, before, things: [], signs: [], long: true })
    }
  }
  return rows
}
