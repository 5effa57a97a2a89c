import type { BudgetLine, Findings, Headroom, Suspect } from '../contract/findings.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { countOf, current, duration, nameOf, sentence } from './words.ts'

/** Fewer trips than this prove almost nothing, whatever the odds say. */
const FEW_TRIPS = 4

/**
 * The answer in one or two sentences: the first suspect with its odds and best reason, then how the headroom stands.
 * Says so when there is too little to say.
 */
export function answer(
  timeline: Timeline,
  hours: number,
  headroom: Headroom,
  budget: readonly BudgetLine[],
  suspects: readonly Suspect[],
): Findings['answer'] {
  const trips = timeline.trips.length
  const room = headroomSentence(headroom)
  if (hours <= 0) return { text: 'Nothing is known of this span yet: no reading and no record.', sureness: null }
  if (trips === 0) {
    return {
      text: join(`No trip in ${duration(hours)} under supply, so there is nothing to explain yet.`, room),
      sureness: null,
    }
  }
  const first = suspects[0]
  const over = `${sentence(countOf(trips, 'trip'))} in ${duration(hours)} under supply`
  if (first === undefined || first.of === 'none' || first.probability < 0.2) {
    const text =
      trips < FEW_TRIPS
        ? `${over}: not enough to say.`
        : `${over}, and nothing on the sheet explains them${first?.of === 'none' ? ` (${odds(first.probability)} that they come at random as far as the data go)` : ''}.`
    return { text: join(text, room), sureness: first?.of === 'none' && trips >= FEW_TRIPS ? first.grade : null }
  }
  const lead =
    first.probability >= 0.9
      ? 'Most likely'
      : first.probability >= 0.6
        ? 'Probably'
        : `${over}: no clear answer yet. Ahead is`
  const name = nameOf(timeline, first.of)
  const reason = shortReason(first)
  const line = budget.find((b) => b.of === first.of)
  const adds =
    line?.ma !== null && line?.ma !== undefined && line.ma >= 0.05
      ? ` ${sentence(name)} adds ${current(line.ma)} mA while on.`
      : ''
  const few = trips < FEW_TRIPS ? ` With ${countOf(trips, 'trip')} almost nothing is proven.` : ''
  return {
    text: join(`${lead} ${name} (${odds(first.probability)})${reason}`, `${room}${adds}${few}`),
    sureness: first.grade,
  }
}

function headroomSentence(headroom: Headroom): string {
  if (headroom.standingMa === null) return ''
  const { value, basis } = headroom.tripMa
  const of = basis === 'limits' ? `about ${current(value)}` : current(value)
  return `Standing leakage uses ${current(headroom.standingMa.p50)} of ${of} mA.`
}

function odds(p: number): string {
  return p >= 0.995 ? 'over 0.99' : p.toFixed(2)
}

/** `: 9 of 11 trips within 3 minutes of its start, against 0.7 by chance.`; only a full stop when there is no such count. */
function shortReason(suspect: Suspect): string {
  const figures = suspect.because[0]?.figures
  if (figures === undefined || typeof figures.when !== 'string' || figures.window === 'any') return '.'
  const { tripsInside, trips, expectedInside, when } = figures
  if (typeof tripsInside !== 'number' || typeof expectedInside !== 'number') return '.'
  return `: ${tripShare(tripsInside, Number(trips))} ${when}, against ${Number(expectedInside.toPrecision(2))} by chance.`
}

/** `9 of 11 trips`, `about 6.5 of 8 trips` where some are known as intervals only, `the one trip`. */
function tripShare(inside: number, trips: number): string {
  const whole = Math.round(inside)
  if (Math.abs(inside - whole) >= 0.05) return `about ${inside.toFixed(1)} of ${countOf(trips, 'trip')}`
  return trips === 1 && whole === 1 ? 'the one trip' : `${whole} of ${trips} trips`
}

function join(a: string, b: string): string {
  return b.trim() === '' ? a : `${a} ${b.trim()}`
}
