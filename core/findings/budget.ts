import type { BudgetLine } from '../contract/findings.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import { accuracyOf, type ClampAccuracy, groupAccuracy } from './accuracy.ts'
import { hiddenPart } from './hidden-part.ts'
import { channelFigure } from './own-channel.ts'
import { type StepEstimate, stepRegression } from './step-regression.ts'
import { type StepRows, stepRows } from './step-rows.ts'
import { type SurveyFigure, surveyFigures } from './survey.ts'
import { countOf, figure, nameOf, rounded, sentence } from './words.ts'

const NO_ROWS: StepRows = { steps: [], placebos: [] }

/**
 * Who uses the headroom up (methods.md §2): one line for each circuit and load in the order of the sheet, mA at the
 * margin: by how much the residual current changes with it. A circuit's figure holds what ran on it when it was
 * switched, so that a circuit's line and its loads' lines do not add. Own channels and clamp surveys come before switching where they
 * are at least as exact. 90 % intervals, never narrower than the clamp.
 */
export function budget(timeline: Timeline): BudgetLine[] {
  const accuracy = groupAccuracy(timeline)
  const rows = timeline.leakage === null ? NO_ROWS : stepRows(timeline, timeline.leakage)
  const steps = stepRegression(rows, accuracy.digitMa / 2)
  const surveys = surveyFigures(timeline)
  const standing = standingAt(rows)
  return timeline.things.map((thing, index) => {
    const step = steps.get(index)
    const survey = surveys.get(thing.of)
    const own = thing.leakage === null ? null : channelFigure(timeline, thing.of, thing.leakage)
    if (own !== null) {
      return line(thing.of, own.ma, own.low, own.high, 'channel', step?.switchings ?? 0, channelNote(step))
    }
    const switching = step === undefined || step.inseparable.length > 0 ? null : figureOf(step, accuracy)
    if (survey !== undefined && (switching === null || survey.half <= switching.half)) {
      const note = surveyNote(survey, switching)
      return line(
        thing.of,
        survey.ma,
        survey.ma - survey.half,
        survey.ma + survey.half,
        'survey',
        step?.switchings ?? 0,
        note,
      )
    }
    if (step === undefined || switching === null) return unjudged(timeline, thing, step)
    const hidden = timeline.conductive === null ? hiddenPart(standing.get(index) ?? 0, switching.ma) : null
    const notes = [
      step.switchings < 3 ? `Rests on ${countOf(step.switchings, 'switching')}.` : '',
      hidden ?? '',
      survey === undefined ? '' : `A clamp survey read ${figure(survey.ma)} mA.`,
    ]
    const note = notes.filter((text) => text !== '').join(' ')
    const { ma, half } = switching
    return line(thing.of, ma, ma - half, ma + half, 'switching', step.switchings, note)
  })
}

function figureOf(step: StepEstimate, accuracy: ClampAccuracy): { ma: number; half: number } {
  return { ma: step.ma, half: Math.hypot(step.half, accuracyOf(accuracy, step.ma)) }
}

function line(
  of: string,
  ma: number,
  low: number,
  high: number,
  basis: BudgetLine['basis'],
  switchings: number,
  note: string,
): BudgetLine {
  const figures = { of, ma: rounded(ma), low: rounded(low), high: rounded(high), basis, switchings }
  return note === '' ? figures : { ...figures, note }
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

function channelNote(step: StepEstimate | undefined): string {
  if (step === undefined || step.inseparable.length > 0) return 'By its own clamp; magnitudes of several do not add.'
  return `By its own clamp; its switching changes the group by ${figure(step.ma)} mA.`
}

function surveyNote(survey: SurveyFigure, switching: { ma: number; half: number } | null): string {
  const pairs = `${sentence(countOf(survey.pairs, 'pair'))} of readings.`
  if (switching === null) return pairs
  return `${pairs} Its switching in the log gives ${figure(switching.ma)} ± ${figure(switching.half)} mA.`
}

/** Mean level beside the changes of each thing, mA, by position. */
function standingAt(rows: StepRows): Map<number, number> {
  const sums = new Map<number, { sum: number; n: number }>()
  for (const row of rows.steps) {
    row.things.forEach((thing, k) => {
      const held = sums.get(thing) ?? { sum: 0, n: 0 }
      // The level without the thing: before it comes on, after it has gone off.
      sums.set(thing, { sum: held.sum + (row.signs[k]! > 0 ? row.before : row.before + row.ma), n: held.n + 1 })
    })
  }
  return new Map([...sums].map(([thing, { sum, n }]) => [thing, sum / n]))
}
