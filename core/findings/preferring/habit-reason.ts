import type { Reason } from '../../contract/findings.ts'
import type { Preference } from '../preference.ts'
import { figure, pValue, rounded } from '../words.ts'
import type { Stratified } from './stratified.ts'

/** Expected counts this far apart, as a ratio and in trips, are told. */
const APART = 1.5
const APART_TRIPS = 0.5
/** Below: more than habit. */
const SURE = 0.05
/** Less than this part of what was seen explains little. */
const LITTLE = 0.5

/**
 * What is left of a preference when like hours are compared, in words; null where it says the same as the plain count. Habits confound: a
 * load that runs in the evening is on at trips of the evening, guilty or not.
 */
export function habitReason(p: Preference): Reason | null {
  const like = p.crossover ?? p.byHour
  if (like === null || p.trips === 0 || p.inside <= 0 || p.window.key === 'any') return null
  // of the trips whose time is known, set against the same trips without strata
  const plain = (p.expected * like.trips) / p.trips
  const differ = Math.abs(like.expected - plain)
  const ratio = Math.max(like.expected, plain) / Math.max(1e-9, Math.min(like.expected, plain))
  if (differ < APART_TRIPS || ratio < APART) return null
  return {
    text: textOf(like, plain, /^(load|circuit):/.test(p.of)),
    method: methodOf(like),
    figures: figuresOf(like, plain),
  }
}

function textOf(like: Stratified, plain: number, isSwitched: boolean): string {
  const hours = like.strata === 'hour' ? 'hours of the day' : 'hours of the week'
  const expected = `${figure(Number(like.expected.toPrecision(2)))} of ${like.trips} would be expected`
  if (like.telling === 0)
    return `It held at the same ${hours} every time, so those hours alone explain the trips as well${isSwitched ? ': only switching it at other hours would tell' : ''}.`
  if (like.expected < plain)
    return like.p < SURE
      ? `It seldom held at the ${hours} at which the trips came: ${expected}, so that its ${number(like.inside)} weigh more (${pValue(like.p)}).`
      : `At the ${hours} at which the trips came, ${expected} (${pValue(like.p)}).`
  const counts = `at the ${hours} at which the trips came, ${expected}`
  if (like.p < SURE) {
    const far = like.expected < LITTLE * like.inside
    return `${far ? 'The time of day does not explain it' : 'Habit is not all of it'}: ${counts}; there were ${number(like.inside)} (${pValue(like.p)}).`
  }
  return `Much of it may be ${isSwitched ? 'habit' : 'the time of day'}: ${counts} anyway; there were ${number(like.inside)} (${pValue(like.p)}).`
}

function number(x: number): string {
  return Math.abs(x - Math.round(x)) < 0.05 ? String(Math.round(x)) : `about ${figure(x)}`
}

function methodOf({ strata }: Stratified): string {
  const estimate = "ratio by Firth's penalised likelihood (1993; Heinze & Puhr 2010), exact sum of unequal chances"
  return strata === 'hour'
    ? `rates stratified by local hour of the day (Mantel & Haenszel 1959); ${estimate}`
    : `time-stratified case-crossover, same hour of the same weekday within four weeks (Maclure 1991; Janes, Sheppard & Lumley 2005); ${estimate}`
}

function figuresOf(like: Stratified, plain: number): Reason['figures'] {
  return {
    tripsInside: rounded(like.inside),
    trips: like.trips,
    tripsTelling: like.telling,
    expectedInside: rounded(like.expected),
    expectedByTimeAlone: rounded(plain),
    rateRatio: like.ratio === null ? null : rounded(like.ratio),
    ratioLow: rounded(like.low),
    ratioHigh: Number.isFinite(like.high) ? rounded(like.high) : null,
    p: rounded(like.p),
    strata: like.strata,
  }
}

/** The plain ratio of rates with its limits, for a suspect of which nothing else is known. */
export function ratioReason(p: Preference): Reason {
  const { ratio, low, high, window } = p
  const method = 'ratio of two Poisson rates with exact 90 % limits (Clopper & Pearson 1934)'
  const figures = {
    rateRatio: ratio !== null && Number.isFinite(ratio) ? rounded(ratio) : null,
    ratioLow: rounded(low),
    ratioHigh: Number.isFinite(high) ? rounded(high) : null,
    hoursInside: rounded(window.insideHours),
  }
  if (window.key === 'any')
    return {
      text: 'There is no time in which it surely could not act: the hours say nothing about it.',
      method,
      figures,
    }
  const hours = `It held for ${figure(window.insideHours)} hours of the time under supply`
  if (ratio === null) return { text: `${hours}, without a trip to judge it by.`, method, figures }
  const text = Number.isFinite(high)
    ? `${hours}; a trip was between ${figure(low)} and ${figure(high)} times as likely then as in any other hour.`
    : `${hours}; a trip was at least ${figure(low)} times as likely then as in any other hour.`
  return { text, method, figures }
}
