import type { Switching, Timetable } from '../contract/records.ts'
import type { Channel } from '../contract/site-sheet.ts'
import type { Kept } from './evidence.ts'
import { clipExposure, type Exposure, exposureOfSpans, fillUnknown, UNKNOWN } from './exposure.ts'
import { loadCurrentRule } from './load-current.ts'
import type { LocalClock } from './local-clock.ts'
import { runningRule, type StepRule, sendsOnlyChanges, stepsOf } from './running.ts'
import { type Series, sliceSeries, usualInterval } from './series.ts'
import { countSpans, eachSpan, NO_SPANS, type Spans, spansOf, union } from './spans.ts'
import type { Thing } from './timeline.ts'
import { exposureOfTimetables } from './timetable-spans.ts'

const DAY = 86_400_000

/** Where states are told from. Series are cut to [from, to), switchings are in order of time. */
export interface StateSources {
  readonly from: number
  readonly to: number
  readonly energised: Spans
  readonly clock: LocalClock
  readonly channels: readonly Channel[]
  readonly series: ReadonlyMap<string, Series>
  readonly switchings: ReadonlyMap<string, readonly Kept<Switching>[]>
  readonly timetables: ReadonlyMap<string, readonly Kept<Timetable>[]>
}

/** A state before the circuit above it is asked, with where it comes from. */
export interface ThingState {
  readonly state: Exposure
  readonly source: Thing['source']
  readonly readEveryMs: Thing['readEveryMs']
}

/**
 * The state of one circuit or load on its own: by its running channel, else its load current, its switchings, its
 * timetables, else as assumed: a circuit is on, of a load nothing is known. Where a channel is silent, a load switched
 * off by hand is off.
 */
export function stateOf(kind: 'circuit' | 'load', ref: string, sources: StateSources, notes: string[]): ThingState {
  const of = `${kind}:${ref}`
  const { from, to } = sources
  const switched = switchingState(sources.switchings.get(of) ?? [], kind === 'circuit', from, to)
  const offByHand = { on: NO_SPANS, off: switched?.off ?? NO_SPANS }
  const running = channelOf(kind, ref, 'running', sources)
  if (running !== null) {
    const state = logged(running.series, runningRule(running.series), sources.energised)
    return { state: fillUnknown(state, offByHand), source: 'running', readEveryMs: readEvery(running.series) }
  }
  const current = kind === 'load' ? channelOf(kind, ref, 'load-current', sources) : null
  if (current !== null) {
    const rule = loadCurrentRule(current.series)
    if (rule !== null) {
      const state = logged(current.series, rule, sources.energised)
      return { state: fillUnknown(state, offByHand), source: 'load-current', readEveryMs: readEvery(current.series) }
    }
    notes.push(`Channel ${current.ref} does not show two levels of current: it does not tell when ${of} runs.`)
  }
  const timetables = sources.timetables.get(of) ?? []
  const timed = exposureOfTimetables(timetables, sources.clock, from, to)
  const assumed = kind === 'circuit' ? exposureOfSpans(spansOf([[from, to]]), from, to) : UNKNOWN
  if (switched !== null)
    return { state: fillUnknown(fillUnknown(switched, timed), assumed), source: 'switching', readEveryMs: null }
  if (timetables.length > 0) return { state: fillUnknown(timed, assumed), source: 'timetable', readEveryMs: null }
  return { state: assumed, source: 'assumed', readEveryMs: null }
}

/** Share of the changes that must come off the beat for a channel that tells changes as they come. */
const OFF_BEAT = 0.3

/**
 * How long a change may stand unread: the usual interval of a channel that reads on the beat, null for one that also
 * tells changes as they come (its changes come sooner after the reading before than the beat).
 */
function readEvery(series: Series): number | null {
  if (sendsOnlyChanges(series)) return null
  const usual = usualInterval(series)
  if (Number.isNaN(usual)) return null
  let changes = 0
  let early = 0
  for (let i = 1; i < series.t.length; i++) {
    if (series.v[i]! >= 0.5 === series.v[i - 1]! >= 0.5) continue
    changes++
    if (series.t[i]! - series.t[i - 1]! < 0.9 * usual) early++
  }
  return changes > 0 && early >= OFF_BEAT * changes ? null : usual
}

/** The state by switchings; before the first one a circuit is on and a load unknown. Null without any. */
function switchingState(
  switchings: readonly Kept<Switching>[],
  onAtFirst: boolean,
  from: number,
  to: number,
): Exposure | null {
  if (switchings.length === 0) return null
  const on: [number, number][] = []
  const off: [number, number][] = []
  if (onAtFirst) on.push([from, Math.min(to, Math.max(from, switchings[0]!.at))])
  for (const [i, change] of switchings.entries()) {
    const a = Math.max(from, change.at)
    const b = Math.min(to, switchings[i + 1]?.at ?? to)
    ;(change.on ? on : off).push([a, b])
  }
  return { on: spansOf(on), off: spansOf(off) }
}

/**
 * Steps of a channel within energised time. A regular logger is read anew after each outage: what it said while there
 * was no supply tells nothing of afterwards. One that sends only changes may not repeat itself, so its last word holds.
 */
function logged(series: Series, rule: StepRule, energised: Spans): Exposure {
  if (countSpans(energised) <= 1 || rule.limit >= DAY) return clipExposure(stepsOf(series, rule), energised)
  let state = UNKNOWN
  const on: Spans[] = []
  const off: Spans[] = []
  for (const { from, to } of eachSpan(energised)) {
    state = clipExposure(stepsOf(sliceSeries(series, from, to), rule), spansOf([[from, to]]))
    on.push(state.on)
    off.push(state.off)
  }
  return { on: joined(on), off: joined(off) }
}

/** Joins sets that follow each other in time. */
function joined(pieces: readonly Spans[]): Spans {
  const all = new Float64Array(pieces.reduce((n, piece) => n + piece.length, 0))
  let n = 0
  for (const piece of pieces) {
    all.set(piece, n)
    n += piece.length
  }
  return union(all, NO_SPANS)
}

function channelOf(
  kind: 'circuit' | 'load',
  ref: string,
  quantity: 'running' | 'load-current',
  { channels, series }: StateSources,
): { readonly ref: string; readonly series: Series } | null {
  for (const channel of channels) {
    const found = series.get(channel.ref)
    if (channel.quantity === quantity && channel[kind] === ref && found !== undefined)
      return { ref: channel.ref, series: found }
  }
  return null
}
