import { lowerBound, type Series } from '../../timeline/series.ts'

/** A temperature this old still stands beside a humidity. */
const HOLD_MS = 3 * 3_600_000

/**
 * Dew point, °C, of air at a temperature (°C) and a relative humidity (%, above 0), by the Magnus formula over water.
 *
 * @see Alduchov & Eskridge (1996), J. Appl. Meteorol. 35, 601-609 (coefficients 17.625 and 243.04, from memory)
 */
export function dewPoint(celsius: number, percent: number): number {
  const gamma = Math.log(percent / 100) + (17.625 * celsius) / (243.04 + celsius)
  return (243.04 * gamma) / (17.625 - gamma)
}

/** Dew point at each reading of humidity with a temperature not older than three hours. */
export function dewPoints(temperature: Series, humidity: Series): Series {
  const t: number[] = []
  const v: number[] = []
  for (let i = 0; i < humidity.t.length; i++) {
    const k = lowerBound(temperature.t, humidity.t[i]! + 1) - 1
    if (k < 0 || humidity.t[i]! - temperature.t[k]! > HOLD_MS || humidity.v[i]! <= 0) continue
    t.push(humidity.t[i]!)
    v.push(dewPoint(temperature.v[k]!, Math.min(100, humidity.v[i]!)))
  }
  return { t: Float64Array.from(t), v: Float64Array.from(v) }
}
