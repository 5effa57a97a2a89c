import type { Timeline } from '../timeline/timeline.ts'

/** Names of the suspects that are no circuit or load. */
const NAMES: Readonly<Record<string, string>> = {
  rain: 'rain',
  temperature: 'the temperature',
  clock: 'something at a fixed clock time',
  period: 'something with a fixed period',
  sun: 'something that follows the sun',
  'load-current': 'a neutral–earth fault (follows the load current)',
  standing: 'standing leakage of many together',
  supply: 'the supply (several devices at once)',
  device: 'the RCD itself',
  unlisted: 'a load that nobody has listed',
  none: 'trips at random, as far as the data go',
}

/** What a suspect is called in a sentence: the label a person gave, else what it is; a circuit without one by its way. */
export function nameOf(timeline: Timeline, of: string): string {
  const thing = timeline.things.find((t) => t.of === of)
  if (thing !== undefined)
    return thing.kind === 'circuit' && thing.label === thing.ref ? `circuit ${thing.ref}` : thing.label
  return NAMES[of] ?? of
}

/** A number for people: three significant digits at most, no trailing noughts. */
export function figure(x: number): string {
  if (!Number.isFinite(x)) return x > 0 ? 'any' : '–'
  if (x === 0) return '0'
  const digits = Math.max(0, Math.min(6, 2 - Math.floor(Math.log10(Math.abs(x)))))
  return String(Number(x.toFixed(digits)))
}

/** A current for people, mA: one decimal from 1 mA on, two below. */
export function current(ma: number): string {
  return Math.abs(ma) >= 0.995 ? ma.toFixed(1) : String(Number(ma.toFixed(2)))
}

/** Hours as days or hours, whichever reads better. */
export function duration(hours: number): string {
  if (hours >= 47.5) return `${figure(hours / 24)} days`
  if (hours >= 1.5) return `${figure(hours)} hours`
  return `${Math.max(1, Math.round(hours * 60))} minutes`
}

const SMALL = ['no', 'one', 'two', 'three', 'four', 'five', 'six', 'seven', 'eight', 'nine', 'ten']

/** `three trips`, `12 trips`, `one trip`. */
export function countOf(n: number, singular: string): string {
  return `${SMALL[n] ?? n} ${singular}${n === 1 ? '' : 's'}`
}

/** First letter large, for the beginning of a sentence. */
export function sentence(text: string): string {
  return text.charAt(0).toUpperCase() + text.slice(1)
}

/** `p = 0.003`, `p < 0.0001`. */
export function pValue(p: number): string {
  return p < 1e-4 ? 'p < 0.0001' : `p = ${figure(p)}`
}

/** Rounds a figure that leaves the program to six significant digits, so that answers do not carry rounding noise. */
export function rounded(x: number): number {
  return Number.isFinite(x) ? Number(x.toPrecision(6)) : x
}
