import { PLAUSIBLE, type Quantity } from '../../core/contract/index.ts'

/** The unit of the contract for each quantity. */
export const UNITS: Readonly<Record<Quantity, string>> = {
  leakage: 'mA',
  'load-current': 'A',
  running: '(0 or 1)',
  voltage: 'V',
  rain: 'mm',
  temperature: '°C',
  humidity: '%',
}

/** Why a value is no reading of this quantity; undefined when it is one. */
export function whyNoValue(value: unknown, quantity: Quantity): string | undefined {
  if (typeof value !== 'number') {
    return value === null ? 'no value: leave a missing reading out' : 'a value is a number, this is none'
  }
  if (!Number.isFinite(value)) return 'a value is a finite number'
  if (quantity === 'running') return value === 0 || value === 1 ? undefined : 'a running reading is 0 or 1'
  const [least, greatest] = PLAUSIBLE[quantity]
  if (value >= least && value <= greatest) return undefined
  return `${value} lies outside ${least} to ${greatest} ${UNITS[quantity]}: an instrument at full scale, or a wrong unit`
}
