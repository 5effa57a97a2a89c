import { type Spans, spansOf, subtract } from './spans.ts'

const DAY = 86_400_000
const MINUTE = 60_000
const RADIANS = Math.PI / 180
/** The sun's centre stands here when its upper limb touches the horizon: 34′ refraction and 16′ radius. */
const ZENITH_OF_RISE = 90.833

/** Rise and set of one day, epoch ms. */
export interface SunTimes {
  /** Null in polar day and polar night. */
  readonly sunrise: number | null
  readonly sunset: number | null
  /** When the sun stands highest. */
  readonly noon: number
  /** `up` or `down` the whole day, or neither. */
  readonly polar: 'up' | 'down' | null
}

/**
 * Sunrise and sunset of the day that holds instant `t` by mean solar time at this longitude (east positive, degrees).
 * Within one to two minutes of the almanac between 72° north and south, within ten beyond, after the NOAA Global
 * Monitoring Laboratory's solar calculator: declination and equation of time of J. Meeus, Astronomical Algorithms (1991), chapters 25 and
 * 28, taken anew at each event. Flat horizon, standard refraction.
 */
export function sunTimes(t: number, latitude: number, longitude: number): SunTimes {
  const meanNoon = Math.floor((t + longitude * 4 * MINUTE) / DAY) * DAY + DAY / 2 - longitude * 4 * MINUTE
  const noon = meanNoon - position(meanNoon).equationMinutes * MINUTE
  const first = hourAngle(noon, latitude)
  if (Number.isNaN(first)) {
    const polar = sineOfNoonHeight(noon, latitude) > 0 ? 'up' : 'down'
    return { sunrise: null, sunset: null, noon, polar }
  }
  const event = (side: -1 | 1): number => {
    let at = noon + side * first * 4 * MINUTE
    for (let round = 0; round < 2; round++) {
      const angle = hourAngle(at, latitude)
      if (Number.isNaN(angle)) break
      at = meanNoon - position(at).equationMinutes * MINUTE + side * angle * 4 * MINUTE
    }
    return Math.round(at)
  }
  return { sunrise: event(-1), sunset: event(1), noon, polar: null }
}

/** The time of [from, to) with the sun below the horizon. */
export function nightSpans(from: number, to: number, latitude: number, longitude: number): Spans {
  const light: [number, number][] = []
  for (let t = from - DAY; t < to + 2 * DAY; t += DAY) {
    const { sunrise, sunset, noon, polar } = sunTimes(t, latitude, longitude)
    if (sunrise !== null && sunset !== null) light.push([sunrise, sunset])
    // A minute more on both sides: solar noons are not exactly a day apart, and no sliver of night may be left between.
    else if (polar === 'up') light.push([noon - DAY / 2 - MINUTE, noon + DAY / 2 + MINUTE])
  }
  return subtract(spansOf([[from, to]]), spansOf(light))
}

/** Degrees between noon and the crossing of the horizon; NaN when it is not crossed. */
function hourAngle(t: number, latitude: number): number {
  const phi = latitude * RADIANS
  const { declination } = position(t)
  const cosine =
    Math.cos(ZENITH_OF_RISE * RADIANS) / (Math.cos(phi) * Math.cos(declination)) - Math.tan(phi) * Math.tan(declination)
  return Math.acos(cosine) / RADIANS
}

/** Sine of the noon height above the height of rise: positive in polar day. */
function sineOfNoonHeight(t: number, latitude: number): number {
  const { declination } = position(t)
  return Math.cos(latitude * RADIANS - declination) - Math.cos(ZENITH_OF_RISE * RADIANS)
}

/** Declination (radians) and equation of time (minutes) of the sun. */
function position(t: number): { declination: number; equationMinutes: number } {
  const century = (t - Date.UTC(2000, 0, 1, 12)) / DAY / 36_525
  const meanLongitude = (280.46646 + century * (36_000.76983 + century * 0.0003032)) * RADIANS
  const anomaly = (357.52911 + century * (35_999.05029 - century * 0.0001537)) * RADIANS
  const eccentricity = 0.016708634 - century * (0.000042037 + century * 0.0000001267)
  const centre =
    (1.914602 - century * (0.004817 + century * 0.000014)) * Math.sin(anomaly) +
    (0.019993 - century * 0.000101) * Math.sin(2 * anomaly) +
    0.000289 * Math.sin(3 * anomaly)
  const node = (125.04 - 1_934.136 * century) * RADIANS
  const apparent = meanLongitude + (centre - 0.00569 - 0.00478 * Math.sin(node)) * RADIANS
  const obliquity =
    (23 +
      (26 + (21.448 - century * (46.815 + century * (0.00059 - century * 0.001813))) / 60) / 60 +
      0.00256 * Math.cos(node)) *
    RADIANS
  const y = Math.tan(obliquity / 2) ** 2
  const equation =
    y * Math.sin(2 * meanLongitude) -
    2 * eccentricity * Math.sin(anomaly) +
    4 * eccentricity * y * Math.sin(anomaly) * Math.cos(2 * meanLongitude) -
    0.5 * y * y * Math.sin(4 * meanLongitude) -
    1.25 * eccentricity * eccentricity * Math.sin(2 * anomaly)
  return {
    declination: Math.asin(Math.sin(obliquity) * Math.sin(apparent)),
    equationMinutes: (4 * equation) / RADIANS,
  }
}
