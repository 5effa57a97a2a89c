import type { Quantity } from '../../core/contract/index.ts'

/** By how many powers of ten a unit is larger than the contract's; units of RFC 8428 table 1 and RFC 8798 table 1 (from memory). */
const POWERS: Readonly<Record<Quantity, Readonly<Record<string, number>>>> = {
  leakage: { A: 3, mA: 0 },
  'load-current': { A: 0, mA: -3 },
  running: { '/': 0 },
  voltage: { V: 0, mV: -3 },
  rain: { m: 3, mm: 0, cm: 1 },
  temperature: { Cel: 0 },
  humidity: { '%RH': 0, '%': 0, '/': 2, '/100': 0, '/1000': -1 },
}

/** Rates of rain, whose integral over seconds is a depth: how many mm one unit times one second is (RFC 8798: mm/h, m/h). */
const RAIN_RATES: Readonly<Record<string, { readonly power: number; readonly per: number }>> = {
  'm/s': { power: 3, per: 1 },
  'mm/h': { power: 0, per: 3_600 },
  'm/h': { power: 3, per: 3_600 },
}

/**
 * A SenML value in the contract's unit of a quantity; undefined when the unit measures something else. Without a unit
 * the value is taken as it is.
 * @param integral the value is one of a rate over seconds, as sums of rain are
 */
export function inContractUnit(
  value: number,
  unit: string | undefined,
  quantity: Quantity,
  integral = false,
): number | undefined {
  if (integral) {
    const rate = Object.hasOwn(RAIN_RATES, unit ?? '') ? RAIN_RATES[unit ?? ''] : undefined
    return rate && Number((shiftDecimal(value, rate.power) / rate.per).toPrecision(12))
  }
  if (unit === undefined) return value
  if (quantity === 'temperature' && unit === 'K') return Number((value - 273.15).toPrecision(12))
  const powers = POWERS[quantity]
  return Object.hasOwn(powers, unit) ? shiftDecimal(value, powers[unit]!) : undefined
}

/** Moves the decimal point as a person would: 0.0129 A is 12.9 mA, not 12.899999999999999. */
function shiftDecimal(value: number, places: number): number {
  if (places === 0) return value
  const [digits, exponent = '0'] = String(value).split('e') as [string, string?]
  return Number(`${digits}e${Number(exponent) + places}`)
}
