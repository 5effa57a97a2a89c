import type { Trace } from '../../core/contract/readings.ts'
import type { Channel, Rcd } from '../../core/contract/site-sheet.ts'
import { offWhere, type StateSpan, spansOfChanges, spansOfTrace, type WrittenChange } from './state-spans.ts'
import type { View } from './view.ts'

/** One lane under the trace. */
export interface Lane {
  /** `circuit:REF` or `load:REF`. */
  readonly of: string
  readonly kind: 'circuit' | 'load'
  readonly label: string
  readonly spans: readonly StateSpan[]
  /** Where its states come from. */
  readonly source: 'running' | 'written' | 'assumed' | 'none'
}

export interface LaneInput {
  readonly rcd: Rcd
  readonly channels: readonly Channel[]
  /** Traces of running channels by channel ref, over `span`. */
  readonly running: ReadonlyMap<string, Trace>
  /** Written changes by subject. */
  readonly changes: ReadonlyMap<string, readonly WrittenChange[]>
  /** When the device stood open: nothing behind it is on. */
  readonly open: readonly View[]
  readonly span: View
  readonly nameOf: (of: string) => string
}

/**
 * Lanes of a device in the order of its sheet, each circuit followed by its loads. Circuits count as on and loads as
 * unknown until the first written change; a running channel beats what is written; what hangs on something that is off
 * is off.
 */
export function lanesOf(input: LaneInput): Lane[] {
  const { from, to } = input.span
  const open = input.open.map((view) => ({ ...view, state: 'off' as const })).sort((a, b) => a.from - b.from)
  return input.rcd.circuits.flatMap((circuit) => {
    const own = laneOf(input, 'circuit', circuit.ref, from, to)
    const circuitLane = { ...own, spans: offWhere(own.spans, open) }
    const loads = circuit.loads.map((load) => {
      const lane = laneOf(input, 'load', load.ref, from, to)
      return { ...lane, spans: offWhere(lane.spans, circuitLane.spans) }
    })
    return [circuitLane, ...loads]
  })
}

function laneOf(input: LaneInput, kind: 'circuit' | 'load', ref: string, from: number, to: number): Lane {
  const of = `${kind}:${ref}`
  const label = input.nameOf(of)
  const channel = input.channels.find((one) => one.quantity === 'running' && one[kind] === ref)
  const trace = channel === undefined ? undefined : input.running.get(channel.ref)
  if (trace !== undefined && trace.t.length > 0) {
    return { of, kind, label, spans: spansOfTrace(trace, from, to), source: 'running' }
  }
  const changes = input.changes.get(of) ?? []
  const before = kind === 'circuit' ? 'on' : 'unknown'
  const source = changes.length > 0 ? 'written' : kind === 'circuit' ? 'assumed' : 'none'
  return { of, kind, label, spans: spansOfChanges(changes, before, from, to), source }
}
