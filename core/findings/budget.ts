import type { BudgetLine } from '../contract/findings.ts'
import type { Series } from '../timeline/series.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import { type ClampAccuracy, differenceError, groupAccuracy, lastPlace } from './accuracy.ts'
import { figuresByLevels } from './budget/by-levels.ts'
import { type Combined, combined, type Source } from './budget/combine.ts'
import { ownBounds, ownParts, type PartStep, sourceOfParts } from './budget/parts.ts'
import { hiddenPart } from './hidden-part.ts'
import { type ChannelFigure, channelFigure } from './own-channel.ts'
import { type StepEstimate, stepRegression } from './step-regression.ts'
import { type StepRows, stepRows } from './step-rows.ts'
import { type SurveyFigure, surveyFigures } from './survey.ts'
import { countOf, figure, nameOf, rounded, sentence } from './words.ts'

const NO_ROWS: StepRows = { steps: [], placebos: [], longPlacebos: [] }
/** A half-width of 90 % over its standard error, for what is given as such. */
const HALF_TO_ERROR = 1.645

/** All that bears on one thing. */
interface Evidence {
  readonly thing: Thing
  /** Its switching, where the log can tell it from others'. */
  readonly step: StepEstimate | undefined
  readonly parts: { readonly conductive: PartStep; readonly capacitive: PartStep } | null
  readonly survey: SurveyFigure | undefined
  readonly own: ChannelFigure | null
  readonly byLevels: Source | null
  /** Level without the thing, mA. */
  readonly withoutMa: number
}

/**
 * Who uses the headroom up (methods.md §2): one line for each circuit and load in the order of the sheet, mA at the
 * margin: by how much the residual current changes with it. A circuit's figure holds what ran on it by the share of time that it
 * ran, so that a circuit's line and its loads' lines do not add; `baseMa` is the circuit alone. Switching, clamp surveys and, where
 * nothing was switched, levels while on and off are weighed together; an own channel reads the thing's own current and comes first.
 * Where both parts are logged the sums are done in both. 90 % intervals.
 */
export function budget(timeline: Timeline): BudgetLine[] {
  const accuracy = groupAccuracy(timeline)
  const { leakage, things } = timeline
  const rows = leakage === null ? NO_ROWS : stepRows(timeline, leakage)
  const place = leakage === null ? 0 : lastPlace(leakage, accuracy.digitMa)
  const steps = stepRegression(things, rows, place / 2)
  const parts = partSteps(timeline, place)
  const surveys = surveyFigures(timeline)
  const without = levelsWithout(rows)
  const own = new Map(
    things.map((thing) => [thing.of, thing.leakage === null ? null : channelFigure(timeline, thing.of, thing.leakage)]),
  )
  const isKnown = (thing: Thing, index: number): boolean => {
    const step = steps.get(index)
    return (step !== undefined && step.inseparable.length === 0) || surveys.has(thing.of) || own.get(thing.of) !== null
  }
  const wanted = things.flatMap((thing, i) => (isKnown(thing, i) || steps.has(i) ? [] : [i]))
  const known = new Map(
    [...steps].flatMap(([i, step]) => (step.inseparable.length === 0 ? [[i, step.ma] as const] : [])),
  )
  const levels = leakage === null || wanted.length === 0 ? null : figuresByLevels(timeline, leakage, wanted, known)
  return things.map((thing, index) => {
    const level = levels?.get(index)
    return lineOf(timeline, accuracy, place, {
      thing,
      step: steps.get(index),
      parts: parts(index),
      survey: surveys.get(thing.of),
      own: own.get(thing.of) ?? null,
      byLevels: level === undefined ? null : { basis: 'switching', ...level },
      withoutMa: without.get(index) ?? 0,
    })
  })
}

function lineOf(timeline: Timeline, accuracy: ClampAccuracy, place: number, seen: Evidence): BudgetLine {
  const { thing, step, own, byLevels } = seen
  const switchings = step?.switchings ?? 0
  const switched = step === undefined || step.inseparable.length > 0 ? null : step
  const sources = sourcesOf(accuracy, place, switched, seen)
  const base = { of: thing.of, switchings, ...baseOf(thing, switched), ...neutralOf(thing, sources) }
  if (own !== null) {
    const said = [{ basis: 'channel' as const, ma: own.ma, low: own.low, high: own.high }, ...sources.map(said90)]
    return {
      ...base,
      ma: rounded(own.ma),
      low: rounded(own.low),
      high: rounded(own.high),
      basis: 'channel',
      ownLow: rounded(own.low),
      ownHigh: rounded(own.high),
      ...(said.length > 1 ? { sources: said.map(roundedSource) } : {}),
      note: channelNote(switched),
    }
  }
  const evidence = sources.length > 0 ? sources : byLevels === null ? [] : [byLevels]
  if (evidence.length === 0) return unjudged(timeline, thing, step)
  const whole = combined(evidence)
  const low = whole.ma - whole.half
  const high = whole.ma + whole.half
  const note = notesOf(timeline, seen, switched, whole)
  return {
    ...base,
    ma: rounded(whole.ma),
    low: rounded(low),
    high: rounded(high),
    basis: whole.basis,
    ...(seen.parts !== null && switched !== null
      ? ownParts(seen.parts.conductive, seen.parts.capacitive)
      : ownBounds(seen.withoutMa, low, high)),
    ...(sources.length === 0 ? { fallback: true } : {}),
    ...(evidence.length > 1 ? { sources: evidence.map((source) => roundedSource(said90(source))) } : {}),
    ...(whole.disagree ? { disagree: true } : {}),
    ...(note === '' ? {} : { note }),
  }
}

function sourcesOf(accuracy: ClampAccuracy, place: number, step: StepEstimate | null, seen: Evidence): Source[] {
  const sources: Source[] = []
  if (step !== null) {
    const clamp = differenceError(accuracy, step.ma, place)
    const { ma, error, freedom } =
      seen.parts === null ? step : sourceOfParts(seen.parts.conductive, seen.parts.capacitive)
    sources.push({ basis: 'switching', ma, error: Math.max(1e-9, Math.hypot(error, clamp)), freedom })
  }
  if (seen.survey !== undefined) {
    const { ma, half, pairs } = seen.survey
    // what a survey allows for is the instrument's, which more pairs do not narrow: its freedom is that of a stated bound
    sources.push({ basis: 'survey', ma, error: Math.max(1e-9, half / HALF_TO_ERROR), freedom: Math.max(30, pairs) })
  }
  return sources
}

/** Steps of both components, by position of the thing; null where either is not logged or cannot tell it apart. */
function partSteps(timeline: Timeline, place: number): (index: number) => Evidence['parts'] {
  const { conductive, capacitive, things } = timeline
  if (conductive === null || capacitive === null) return () => null
  const component = (series: Series): Component => {
    const rows = stepRows(timeline, series)
    return { steps: stepRegression(things, rows, place / 2), without: levelsWithout(rows) }
  }
  const g = component(conductive)
  const b = component(capacitive)
  return (index) => {
    const one = partOf(g, index)
    const other = partOf(b, index)
    return one === null || other === null ? null : { conductive: one, capacitive: other }
  }
}

interface Component {
  readonly steps: ReadonlyMap<number, StepEstimate>
  readonly without: ReadonlyMap<number, number>
}

function partOf({ steps, without }: Component, index: number): PartStep | null {
  const step = steps.get(index)
  if (step === undefined || step.inseparable.length > 0) return null
  return { ma: step.ma, error: step.error, freedom: step.freedom, withoutMa: without.get(index) ?? 0 }
}

function baseOf(thing: Thing, step: StepEstimate | null): Pick<BudgetLine, 'baseMa'> {
  return thing.kind === 'circuit' && step !== null ? { baseMa: rounded(step.baseMa) } : {}
}

/** A breaker that opens the line only leaves what leaks from the neutral. */
function neutralOf(thing: Thing, sources: readonly Source[]): Pick<BudgetLine, 'neutralStays'> {
  return thing.isolation === 'single-pole' && sources.length > 0 ? { neutralStays: true } : {}
}

function said90(source: Source): { basis: Source['basis']; ma: number; low: number; high: number } {
  const { ma, half } = combined([source])
  return { basis: source.basis, ma, low: ma - half, high: ma + half }
}

function roundedSource(said: ReturnType<typeof said90>): ReturnType<typeof said90> {
  return { basis: said.basis, ma: rounded(said.ma), low: rounded(said.low), high: rounded(said.high) }
}

function unjudged(timeline: Timeline, thing: Thing, step: StepEstimate | undefined): BudgetLine {
  const base = {
    of: thing.of,
    ma: null,
    low: null,
    high: null,
    basis: 'unjudged',
    switchings: step?.switchings ?? 0,
  } as const
  if (step !== undefined) {
    const others = step.inseparable.map((index) => nameOf(timeline, timeline.things[index]!.of))
    return {
      ...base,
      note: `Always switched together with ${others.join(', ')}: the log cannot tell them apart. Switch it alone once.`,
    }
  }
  if (timeline.leakage === null) return { ...base, note: 'No leakage is logged on this device.' }
  const note =
    thing.changes.length === 0
      ? 'Never switched while the state was known.'
      : 'Switched only where no leakage was logged, or with its circuit.'
  return { ...base, note }
}

function notesOf(timeline: Timeline, seen: Evidence, step: StepEstimate | null, whole: Combined): string {
  const { thing, survey } = seen
  const hidden = timeline.conductive === null && step !== null ? hiddenPart(seen.withoutMa, whole.ma) : null
  const notes = [
    step === null && survey === undefined
      ? 'From levels while it was on and off, without a switching that the log shows: weather and habit do not cancel.'
      : '',
    step !== null && step.switchings < 3 ? `Rests on ${countOf(step.switchings, 'switching')}.` : '',
    survey === undefined ? '' : surveyNote(survey, step, whole),
    thing.isolation === 'single-pole'
      ? 'Its breaker opens the line only: what leaks from its neutral is not in the figure.'
      : '',
    hidden ?? '',
  ]
  return notes.filter((text) => text !== '').join(' ')
}

function channelNote(step: StepEstimate | null): string {
  if (step === null) return 'By its own clamp; magnitudes of several do not add.'
  return `By its own clamp; its switching changes the group by ${figure(step.ma)} mA.`
}

function surveyNote(survey: SurveyFigure, step: StepEstimate | null, { disagree }: Combined): string {
  const pairs = `${sentence(countOf(survey.pairs, 'pair'))} of clamp readings`
  if (step === null) return `${pairs}.`
  return disagree
    ? `${pairs} give ${figure(survey.ma)} mA, its switching in the log ${figure(step.ma)} mA: they disagree by more than either allows, so the interval holds both.`
    : `${pairs} give ${figure(survey.ma)} mA, its switching in the log ${figure(step.ma)} mA.`
}

/** Mean level beside the changes of each thing without it, mA, by position: before it comes on, after it has gone off. */
function levelsWithout(rows: StepRows): Map<number, number> {
  const sums = new Map<number, { sum: number; n: number }>()
  for (const row of rows.steps) {
    row.things.forEach((thing, k) => {
      const held = sums.get(thing) ?? { sum: 0, n: 0 }
      sums.set(thing, { sum: held.sum + (row.signs[k]! > 0 ? row.before : row.before + row.ma), n: held.n + 1 })
    })
  }
  return new Map([...sums].map(([thing, { sum, n }]) => [thing, sum / n]))
}
