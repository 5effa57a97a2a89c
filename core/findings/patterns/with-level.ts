import type { Pattern } from '../../contract/findings.ts'
import { current, figure, rounded } from '../words.ts'
import type { LevelResponse } from './level-response.ts'
import { COINCIDENCE_METHOD, type Coincidence } from './onsets.ts'

const SPOKEN = 0.05
/** A level is said to follow when none of 99 rotations does as well and hours held out are foretold so far. */
const FOLLOWS_P = 0.01
const LEAST_HELD_OUT = 0.05
/** A lag known no closer than so many hours is none. */
const VAGUE_HOURS = 10
const RESPONSE_METHOD =
  'lagged regression of hourly levels, law and lag by held-out fit (Stone 1974), p by rotation (Chung & Fraser 1958)'

/** A driver as it is spoken of: "10 mm of rain still standing", "5 °C more". */
export interface Driver {
  readonly words: string
  /** What begins when a spell of it does: "rain", "a cold spell". */
  readonly spell: string
}

/** Whether the level follows a driver beyond chance. */
export function isResponse(response: LevelResponse | null): response is LevelResponse {
  return (
    response !== null &&
    response.p <= FOLLOWS_P &&
    response.heldOut >= LEAST_HELD_OUT &&
    response.lagHigh - response.lagLow <= VAGUE_HOURS
  )
}

/** How the level follows a driver, as one sentence. */
export function responseWords(response: LevelResponse | null, driver: Driver): string {
  if (response === null) return ''
  if (!isResponse(response)) return ' The leakage does not follow it.'
  const change = `${response.rise < 0 ? 'falls' : 'rises'} by ${current(Math.abs(response.rise))} mA`
  const reach =
    response.lagLow === response.lagHigh ? '' : ` (${figure(response.lagLow)} to ${figure(response.lagHigh)})`
  const late = response.lag === 0 && response.lagHigh === 0 ? 'at once' : `${hoursWords(response.lag)}${reach} later`
  const drying = response.halfLife === null ? '' : `, and dries by half in ${hoursWords(response.halfLife)}`
  return ` The leakage ${change} with ${driver.words}, ${late}${drying}.`
}

function hoursWords(hours: number): string {
  return hours === 1 ? '1 hour' : `${figure(hours)} hours`
}

/** The preference of trips with the coincidences and the level's response beside it; p pays for rates and coincidences. */
export function withLevel(
  rates: Pattern,
  together: Coincidence | null,
  response: LevelResponse | null,
  driver: Driver,
): Pattern {
  const known = rates.p ?? null
  const p = known === null ? null : together === null ? known : Math.min(1, 2 * Math.min(known, together.p))
  const methods = [
    rates.method,
    together === null ? undefined : COINCIDENCE_METHOD,
    response === null ? undefined : RESPONSE_METHOD,
  ]
  const method = methods.filter((one) => one !== undefined).join('; ')
  return {
    ...rates,
    verdict: `${verdictOf(rates, together, p, driver.spell)}${responseWords(response, driver)}`,
    p: p === null ? null : rounded(p),
    ...(method === '' ? {} : { method }),
    ...together?.figures,
    ...(response === null ? {} : figuresOfResponse(response)),
  }
}

function verdictOf(rates: Pattern, together: Coincidence | null, p: number | null, spell: string): string {
  if (together === null || p === null || p >= SPOKEN || 2 * (rates.p ?? 1) < SPOKEN) {
    const isNone = p !== null && p >= SPOKEN
    return isNone ? rates.verdict.replace(/^(More|Fewer) trips than chance:/, 'No clear preference:') : rates.verdict
  }
  const { coincidenceRate, coincidenceExpected, coincidenceWindowHours, coincidenceLagHours } = together.figures
  const percent = (x: number): string => `${Math.round(100 * x)} %`
  const [from, until] = [coincidenceLagHours!, coincidenceLagHours! + coincidenceWindowHours!]
  const when = from === 0 ? `within ${until} hours` : `${from} to ${until} hours`
  return `${percent(coincidenceRate!)} of the trips came ${when} after ${spell} began; ${percent(coincidenceExpected!)} would by chance.`
}

function figuresOfResponse(response: LevelResponse): Record<string, number | boolean | null> {
  return {
    levelFollows: isResponse(response),
    levelP: rounded(response.p),
    levelRiseMa: rounded(response.rise),
    levelCorrelation: rounded(response.correlation),
    levelHeldOut: rounded(response.heldOut),
    lagHours: rounded(response.lag),
    lagLow: rounded(response.lagLow),
    lagHigh: rounded(response.lagHigh),
    halfLifeHours: response.halfLife === null ? null : rounded(response.halfLife),
  }
}
