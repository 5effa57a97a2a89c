import { figure, milliamps, THIN } from '../format/numbers.ts'

/** A figure of a reason as the page shows it. */
export interface FigureWords {
  readonly name: string
  readonly value: string
}

/** Units that the API writes at the end of a figure's name. */
const UNITS: ReadonlyMap<string, string> = new Map([
  ['Mm', 'mm'],
  ['Minutes', 'min'],
  ['Hours', 'h'],
  ['Days', 'd'],
])

/** `usualHeadroomMa: 12.4` reads as `usual headroom`, `12.4 mA`. */
export function figureWords(name: string, value: number | string | boolean | null): FigureWords {
  const unit = /(?<=[a-z])[A-Z][a-z]+$/.exec(name)?.[0] ?? ''
  const bare = wordsOf(name.slice(0, name.length - unit.length))
  const written = unit === 'Ma' ? 'mA' : UNITS.get(unit)
  if (written === undefined || typeof value === 'string' || typeof value === 'boolean') {
    return { name: wordsOf(name), value: figure(value) }
  }
  if (value === null) return { name: bare, value: figure(value) }
  return { name: bare, value: unit === 'Ma' ? milliamps(value) : `${figure(value)}${THIN}${written}` }
}

/** `rateRatio` reads as `rate ratio`. */
function wordsOf(name: string): string {
  return name.replace(/([a-z0-9])([A-Z])/g, (_, a: string, b: string) => `${a} ${b.toLowerCase()}`)
}
