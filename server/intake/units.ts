import type { Quantity } from '../../core/contract/index.ts'

/** By how many powers of ten a unit is larger than the contract's; units of RFC 8428 table 1 and RFC 8798 table 1 (from memory). */
const POWERS: Readonly<Record<Quantity, Readonly<Record<string, number>>>> = {
  leakage: { A: 3, mA: 0 },
  'load-current': { A: 0, mA: -3 },
  running: { '/': 0 },
  voltage: { V: 0, mV: -3 },
  rain: { m: 3, mm: 0, cm: 1 },
  temperature: { Cel: 0 },
  humidity: { '%RH': 0, '%': 0, '/': 2, '/100': 0 },
}

/**
 * A SenML value in the contract's unit of a quantity; undefined when the unit measures something else. Without a unit
 * the value is taken as it is.
 */
export function inContractUnit(value: number, unit: string | undefined, quantity: Quantity): number | undefined {
  if (unit === undefined) return value
  if (quantity === 'temperature' && unit === 'K') return Number((value - 273.15).toPrecision(12))
  const power = POWERS[quantity][unit]
  return power === undefined ? undefined : shiftDecimal(value, power)
}

/** Moves the decimal point as a person would: 0.0129 A is 12.9 mA, not 12.899999999999999. */
function shiftDecimal(value: number, places: number): number {
  if (places === 0) return value
  const [digits, exponent = '0'] = String(value).split('e') as [string, string?]
  return Number(`${digits}e${Number(exponent) + places}`)
}
